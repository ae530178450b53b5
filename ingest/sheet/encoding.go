package sheet

import (
	"bufio"
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"regexp"
	"strings"
	"unicode/utf16"
	"unicode/utf8"

	"golang.org/x/text/encoding/htmlindex"
)

var reEncoding = regexp.MustCompile(`^<\?xml\s[^>]*?\sencoding\s*=\s*["']([A-Za-z0-9._:-]+)["']`)

// toUTF8 reads XML of any encoding as UTF-8 without a mark, as XML 1.0,
// appendix F, finds it out: by a mark, by the zero bytes of "<", as declared.
func toUTF8(b *bufio.Reader) (io.Reader, error) {
	head, err := b.Peek(256)
	if err != nil && err != io.EOF {
		return nil, err
	}
	switch {
	case bytes.HasPrefix(head, []byte("\xef\xbb\xbf")):
		_, err := b.Discard(3)
		return b, err
	case bytes.HasPrefix(head, []byte{0xff, 0xfe}):
		_, err := b.Discard(2)
		return &wide{r: b, order: binary.LittleEndian}, err
	case bytes.HasPrefix(head, []byte{0xfe, 0xff}):
		_, err := b.Discard(2)
		return &wide{r: b, order: binary.BigEndian}, err
	case bytes.HasPrefix(head, []byte{'<', 0}):
		return &wide{r: b, order: binary.LittleEndian}, nil
	case bytes.HasPrefix(head, []byte{0, '<'}):
		return &wide{r: b, order: binary.BigEndian}, nil
	}
	m := reEncoding.FindSubmatch(head)
	if m == nil {
		return b, nil
	}
	label := strings.ToLower(string(m[1]))
	// Who declares UTF-16 in single bytes has not written it.
	if label == "utf-8" || label == "us-ascii" || strings.HasPrefix(label, "utf-16") {
		return b, nil
	}
	enc, err := htmlindex.Get(label)
	if err != nil {
		return nil, fmt.Errorf("its encoding %q is not known", label)
	}
	return enc.NewDecoder().Reader(b), nil
}

// wide reads UTF-16 as UTF-8 and refuses halves of characters.
type wide struct {
	r     *bufio.Reader
	order binary.ByteOrder
}

// Read takes four bytes at least.
func (w *wide) Read(p []byte) (int, error) {
	if len(p) < utf8.UTFMax {
		return 0, io.ErrShortBuffer
	}
	n := 0
	for n+utf8.UTFMax <= len(p) {
		r, err := w.unit()
		if err != nil {
			return n, err
		}
		if utf16.IsSurrogate(r) {
			low, err := w.unit()
			if r = utf16.DecodeRune(r, low); err != nil || r == utf8.RuneError {
				return n, errors.New("a character is cut in half")
			}
		}
		n += utf8.EncodeRune(p[n:], r)
	}
	return n, nil
}

func (w *wide) unit() (rune, error) {
	var b [2]byte
	var err error
	if b[0], err = w.r.ReadByte(); err != nil {
		return 0, err
	}
	if b[1], err = w.r.ReadByte(); err == io.EOF {
		return 0, errors.New("a character is cut at the end")
	}
	return rune(w.order.Uint16(b[:])), err
}
