package sheet

import (
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/binary"
	"fmt"
	"io"
	"os"
	"time"
	"unicode/utf16"
	"unicode/utf8"
)

// Content is what one pass over a file's bytes tells.
type Content struct {
	SHA256   [32]byte
	Bytes    int64
	Changed  string // date of the file, "2026-03-01"
	head     []byte
	utf8     bool  // valid throughout
	nuls     int64 // zero bytes
	controls int64 // control characters that text does not have
}

// ReadContent passes once over the file.
func ReadContent(ctx context.Context, path string) (*Content, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	st, err := f.Stat()
	if err != nil {
		return nil, err
	}
	if st.IsDir() {
		return nil, fmt.Errorf("%s is a folder", path)
	}
	c := &Content{Changed: st.ModTime().UTC().Format(time.DateOnly), utf8: true}
	h := sha256.New()
	buf := make([]byte, 256<<10)
	var carry int // bytes of a character cut at the end of the buffer
	for {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		n, err := f.Read(buf[carry:])
		if n > 0 {
			h.Write(buf[carry : carry+n])
			c.Bytes += int64(n)
			if len(c.head) < 64<<10 {
				c.head = append(c.head, buf[carry:carry+n]...)
			}
			carry = c.look(buf[:carry+n])
		}
		if err == io.EOF {
			break
		}
		if err != nil {
			return nil, err
		}
	}
	c.utf8 = c.utf8 && carry == 0
	h.Sum(c.SHA256[:0])
	return c, nil
}

// look takes stock of b and moves a character cut at its end to its front.
func (c *Content) look(b []byte) (carry int) {
	for _, x := range b {
		if x == 0 {
			c.nuls++
		} else if x < ' ' && x != '\n' && x != '\r' && x != '\t' && x != '\f' && x != 0x1a {
			c.controls++
		}
	}
	if !c.utf8 {
		return 0
	}
	end := len(b)
	for i := 1; i <= utf8.UTFMax && i <= len(b); i++ {
		if utf8.RuneStart(b[len(b)-i]) {
			if !utf8.FullRune(b[len(b)-i:]) {
				end = len(b) - i
			}
			break
		}
	}
	c.utf8 = utf8.Valid(b[:end])
	return copy(b, b[end:])
}

func (c *Content) zip() bool {
	return bytes.HasPrefix(c.head, []byte("PK\x03\x04")) || bytes.HasPrefix(c.head, []byte("PK\x05\x06"))
}

func (c *Content) ole() bool {
	return bytes.HasPrefix(c.head, []byte{0xD0, 0xCF, 0x11, 0xE0, 0xA1, 0xB1, 0x1A, 0xE1})
}

// other names what a file is that begins as no table does; programs like to
// save web pages and XML under the name of a spreadsheet.
func (c *Content) other() string {
	head := bytes.ToLower(bytes.TrimLeft(bytes.TrimPrefix(c.head, []byte("\xef\xbb\xbf")), " \t\r\n"))
	for _, k := range [][2]string{
		{"<!doctype", "a web page"}, {"<html", "a web page"}, {"<table", "a web page"}, {"<?xml", "XML"}, {"<workbook", "XML"},
		{"%pdf", "a PDF document"}, {`{\rtf`, "a text document"}, {`{"`, "JSON"}, {"[{", "JSON"}, {"mime-version:", "a web page"},
	} {
		if bytes.HasPrefix(head, []byte(k[0])) {
			return k[1]
		}
	}
	return ""
}

// utf16 finds the byte order of UTF-16 text by its mark or by its zero bytes.
func (c *Content) utf16() (binary.ByteOrder, bool) {
	switch {
	case bytes.HasPrefix(c.head, []byte{0xFF, 0xFE}):
		return binary.LittleEndian, true
	case bytes.HasPrefix(c.head, []byte{0xFE, 0xFF}):
		return binary.BigEndian, true
	}
	var even, odd int
	for i, x := range c.head {
		if x == 0 && i%2 == 0 {
			even++
		} else if x == 0 {
			odd++
		}
	}
	half := len(c.head) / 2
	switch {
	case half >= 4 && odd > half*7/10 && even == 0:
		return binary.LittleEndian, true
	case half >= 4 && even > half*7/10 && odd == 0:
		return binary.BigEndian, true
	}
	return nil, false
}

func (c *Content) binary() bool {
	if _, ok := c.utf16(); ok {
		return false
	}
	return c.nuls > 0 || c.controls*200 > c.Bytes
}

// oleProblem tells a password-protected workbook from an old .xls: both are
// compound files, but only the first has a stream named EncryptedPackage.
func oleProblem(path string) error {
	f, err := os.Open(path)
	if err != nil {
		return err
	}
	defer f.Close()
	var name []byte
	for _, u := range utf16.Encode([]rune("EncryptedPackage")) {
		name = binary.LittleEndian.AppendUint16(name, u)
	}
	found, err := holds(f, name)
	if err != nil {
		return fmt.Errorf("read %s: %w", path, err)
	}
	if found {
		return &BadFile{"password", "the workbook is password-protected", "remove the password and save again"}
	}
	return &BadFile{"old-xls", "the file is an old .xls workbook or another compound document", "open it in a spreadsheet program and save it as .xlsx"}
}

// holds reports whether what comes from r holds mark.
func holds(r io.Reader, mark []byte) (bool, error) {
	buf := make([]byte, 256<<10)
	kept := 0 // the end of what came before, which mark may begin in
	for {
		n, err := r.Read(buf[kept:])
		n += kept
		if bytes.Contains(buf[:n], mark) {
			return true, nil
		}
		kept = copy(buf, buf[max(0, n-len(mark)+1):n])
		if err == io.EOF {
			return false, nil
		}
		if err != nil {
			return false, err
		}
	}
}
