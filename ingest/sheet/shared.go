package sheet

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"strconv"
	"unicode/utf8"
)

// texts are the texts that cells share, in pieces of memory of some size each.
type texts struct {
	chunks []string
	last   []byte // becomes a chunk when it is full
	at     []textAt
}

// textAt is where a text lies.
type textAt struct {
	offset uint32 // of all chunks laid end to end, each chunkBytes
	length uint32
}

// chunkBytes holds the longest text.
const chunkBytes = maxCellBytes

func (t *texts) add(b []byte) {
	if len(t.last)+len(b) > chunkBytes {
		t.chunks = append(t.chunks, string(t.last))
		t.last = t.last[:0]
	}
	t.at = append(t.at, textAt{uint32(len(t.chunks)*chunkBytes + len(t.last)), uint32(len(b))})
	t.last = append(t.last, b...)
}

// seal is called after the last add.
func (t *texts) seal() {
	t.chunks = append(t.chunks, string(t.last))
	t.last = nil
}

func (t *texts) get(i int) string {
	a := t.at[i]
	off := a.offset % chunkBytes
	return t.chunks[a.offset/chunkBytes][off : off+a.length]
}

func (x *xlsx) readTexts(part string) error {
	if x.part(part) == nil {
		return nil // cells that refer to a missing part fail by themselves
	}
	p, err := x.open(context.Background(), part, maxTextBytes)
	if err != nil {
		return err
	}
	defer p.close()
	r := textReader{part: part, tokens: p.tokens}
	err = r.read(&x.texts)
	x.texts.seal()
	return err
}

// textReader reads shared strings: runs of a rich text are joined, hints for
// pronunciation left out.
type textReader struct {
	*tokens
	part         string
	inItem, want bool
	hints        int // open hints for pronunciation
	text         []byte
}

func (r *textReader) read(out *texts) error {
	for {
		k, err := r.next()
		if err != nil {
			return err
		}
		switch k {
		case tokenEOF:
			return nil
		case tokenStart:
			err = r.start()
		case tokenEnd:
			err = r.finish(out)
		case tokenText:
			if r.want && r.hints == 0 {
				r.text = append(r.text, r.data...)
			}
		}
		if err == nil && len(r.text) > maxCellBytes {
			err = &BadFile{"too-wide", fmt.Sprintf("text %d of part %.80q has more than %d characters", len(out.at), r.part, maxCellBytes), "check the cells and save again"}
		}
		if err != nil {
			return err
		}
	}
}

func (r *textReader) start() error {
	if r.want {
		return fmt.Errorf("element %.40q within a text", r.local)
	}
	switch string(r.local) {
	case "si":
		if r.inItem {
			return errors.New("a text within a text")
		}
		r.inItem = true
		r.text = r.text[:0]
	case "t":
		r.want = r.inItem
	case "rPh":
		r.hints++
	default:
		if r.depth() == 1 && string(r.local) != "sst" {
			return fmt.Errorf("it is %.40q and no table of texts", r.local)
		}
	}
	return nil
}

func (r *textReader) finish(out *texts) error {
	switch string(r.local) {
	case "si":
		if len(out.at) >= maxTexts {
			return tooBig(r.part, maxTextBytes)
		}
		r.inItem = false
		out.add(unescape(r.text))
	case "t":
		r.want = false
	case "rPh":
		r.hints--
	}
	return nil
}

// unescape undoes in place the format's own escapes of characters XML cannot
// hold: _x000D_.
func unescape(b []byte) []byte {
	from := bytes.Index(b, []byte("_x"))
	if from < 0 {
		return b
	}
	out := b[:from]
	for i := from; i < len(b); {
		if len(b) >= i+7 && b[i] == '_' && b[i+1] == 'x' && b[i+6] == '_' {
			if n, err := strconv.ParseUint(string(b[i+2:i+6]), 16, 16); err == nil {
				if n == 0 {
					n = utf8.RuneError // no text that is to be stored holds it
				}
				out = utf8.AppendRune(out, rune(n))
				i += 7
				continue
			}
		}
		out = append(out, b[i])
		i++
	}
	return out
}
