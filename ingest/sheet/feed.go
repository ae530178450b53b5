package sheet

import (
	"bufio"
	"bytes"
	"context"
	"encoding/binary"
	"errors"
	"io"
	"math/bits"
	"unicode/utf8"
)

// blockBytes is how much of a part is unpacked at a time.
const blockBytes = 128 << 10

// feed gives the text of a part block by block, io.EOF after the last. A block
// is valid until the next call.
type feed interface {
	next(ctx context.Context) ([]byte, error)
	close()
}

// characters reads UTF-8 and refuses what XML cannot hold.
type characters struct {
	r    io.Reader
	tail []byte // of a character cut at the end of a block
}

func newCharacters(r io.Reader) (*characters, error) {
	b := bufio.NewReaderSize(r, 4096)
	in, err := toUTF8(b)
	return &characters{r: in}, err
}

// fill reads as many whole characters as b takes. The error, io.EOF at the end, comes beside
// what was read before it.
func (c *characters) fill(b []byte) (int, error) {
	n := copy(b, c.tail)
	c.tail = c.tail[:0]
	var err error
	for idle := 0; n+utf8.UTFMax <= len(b) && err == nil; {
		var m int
		m, err = c.r.Read(b[n:])
		n += m
		if m > 0 {
			idle = 0
		} else if idle++; idle > 100 && err == nil {
			err = io.ErrNoProgress
		}
	}
	whole := n - cutRune(b[:n])
	if whole < n {
		if err == io.EOF {
			return whole, errors.New("a character is cut at the end")
		}
		c.tail = append(c.tail, b[whole:n]...)
	}
	if !allowed(b[:whole]) {
		return 0, errors.New("it holds bytes that are no text")
	}
	return whole, err
}

// cutRune is the length of the beginning of a character at the end of b.
func cutRune(b []byte) int {
	for i := 1; i < utf8.UTFMax && i <= len(b); i++ {
		if c := b[len(b)-i]; utf8.RuneStart(c) {
			if c >= utf8.RuneSelf && !utf8.FullRune(b[len(b)-i:]) {
				return i
			}
			break
		}
	}
	return 0
}

// allowed reports whether b is UTF-8 of characters that XML allows.
func allowed(b []byte) bool {
	const ones, highs = 0x0101010101010101, 0x8080808080808080
	var all uint64
	i := 0
	for ; i+8 <= len(b); i += 8 {
		w := binary.LittleEndian.Uint64(b[i:])
		all |= w
		for low := (w - 0x20*ones) & ^w & highs; low != 0; low &= low - 1 { // bytes below a space, perhaps
			if !allowedControl(b[i+bits.TrailingZeros64(low)/8]) {
				return false
			}
		}
	}
	for ; i < len(b); i++ {
		all |= uint64(b[i])
		if !allowedControl(b[i]) {
			return false
		}
	}
	if all&highs == 0 {
		return true
	}
	return utf8.Valid(b) && !bytes.Contains(b, []byte("\ufffe")) && !bytes.Contains(b, []byte("\uffff"))
}

func allowedControl(c byte) bool { return c >= ' ' || c == '\n' || c == '\r' || c == '\t' }

// direct is the feed of a small part.
type direct struct {
	c   *characters
	buf []byte
	err error
}

func (d *direct) next(ctx context.Context) ([]byte, error) {
	if d.err == nil {
		d.err = ctx.Err()
	}
	if d.err != nil {
		return nil, d.err
	}
	if d.buf == nil {
		d.buf = make([]byte, 16<<10)
	}
	var n int
	n, d.err = d.c.fill(d.buf)
	return d.buf[:n], nil
}

func (d *direct) close() {}

type block struct {
	b   []byte
	err error
}

// pump unpacks and checks in a goroutine of its own while the blocks before are
// taken apart.
type pump struct {
	full chan block
	free chan []byte
	last block
}

const pumpBlocks = 4

func newPump(c *characters) *pump {
	p := &pump{full: make(chan block, pumpBlocks), free: make(chan []byte, pumpBlocks)}
	for range pumpBlocks {
		p.free <- make([]byte, blockBytes)
	}
	go func() {
		defer close(p.full)
		for b := range p.free {
			n, err := c.fill(b[:cap(b)])
			p.full <- block{b[:n], err}
			if err != nil {
				return
			}
		}
	}()
	return p
}

func (p *pump) next(ctx context.Context) ([]byte, error) {
	if p.last.err != nil {
		return nil, p.last.err
	}
	if p.last.b != nil {
		p.free <- p.last.b // there is room for all blocks
	}
	if err := ctx.Err(); err != nil {
		p.last = block{err: err}
		return nil, err
	}
	p.last = <-p.full
	return p.last.b, nil
}

// close ends the goroutine and waits for it.
func (p *pump) close() {
	close(p.free)
	for range p.full {
	}
}
