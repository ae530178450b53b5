package sheet

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
)

// Limits on the XML of a part.
const (
	maxDepth    = 256
	maxTagBytes = 1 << 20
	maxHeld     = 64 << 10 // text that is held back to have it in one piece
)

// token is what XML is made of; references to characters are resolved, comments
// and processing instructions left out. An empty element is a start and an end.
type token uint8

const (
	tokenStart token = iota
	tokenEnd
	tokenText // perhaps one of several in a row
	tokenEOF  // the root element was closed, and nothing but blanks follow
)

// tokens takes a part apart in one forward pass. It demands what makes XML well
// formed, so that damage is an error and never an early end; of namespaces it
// strips the prefixes. A document type declaration is refused, as ECMA-376 Part
// 2 has it for every part, and with it entities of a part's own making.
type tokens struct {
	ctx context.Context
	in  feed
	buf []byte // what is read; from pos on not yet taken
	pos int
	end bool // nothing follows buf

	local []byte // name of the last start or end
	data  []byte // the last text
	tag   []byte // the last start tag
	attrs []attribute

	open    []int // lengths of names before each open element
	names   []byte
	closing bool // an empty element's end is due
	cdata   bool
	rooted  bool
	scratch []byte
}

// attribute is offsets of a tag.
type attribute struct{ name, nameEnd, value, valueEnd int }

func newTokens(ctx context.Context, in feed) *tokens {
	return &tokens{ctx: ctx, in: in}
}

// depth is how many elements are open; a start counts itself, an end does not.
func (t *tokens) depth() int { return len(t.open) }

var errCut = errors.New("it ends before it should")

// more reads the next block behind what is not yet taken.
func (t *tokens) more() error {
	if t.end {
		return errCut
	}
	b, err := t.in.next(t.ctx)
	n := copy(t.buf, t.buf[t.pos:])
	t.buf, t.pos = append(t.buf[:n], b...), 0
	if err == io.EOF {
		t.end = true
		return nil
	}
	return err
}

// next moves on by one token. What the last one left in t is then overwritten.
func (t *tokens) next() (token, error) {
	if t.closing {
		t.closing = false
		t.pop()
		return tokenEnd, nil
	}
	for {
		if t.cdata {
			if got, err := t.section(); got || err != nil {
				return tokenText, err
			}
			continue
		}
		if len(t.buf)-t.pos < 2 && !t.end {
			if err := t.more(); err != nil {
				return 0, err
			}
			continue
		}
		if t.pos == len(t.buf) {
			if len(t.open) > 0 || !t.rooted {
				return 0, errCut
			}
			return tokenEOF, nil
		}
		if t.buf[t.pos] != '<' {
			if got, err := t.text(); got || err != nil {
				return tokenText, err
			}
			continue
		}
		if t.pos+1 == len(t.buf) {
			return 0, errCut
		}
		switch t.buf[t.pos+1] {
		case '/':
			return tokenEnd, t.endTag()
		case '!':
			if err := t.declaration(); err != nil {
				return 0, err
			}
		case '?':
			t.pos += 2
			if err := t.skipPast("?>"); err != nil {
				return 0, err
			}
		default:
			return tokenStart, t.startTag()
		}
	}
}

// text takes text up to the next mark, or as much as is whole.
func (t *tokens) text() (bool, error) {
	b := t.buf[t.pos:]
	i, odd := 0, false
	for i < len(b) && b[i] != '<' {
		odd = odd || class[b[i]]&oddText != 0
		i++
	}
	if i == len(b) && !t.end {
		if i -= cutText(b); i < maxHeld {
			return false, t.more()
		}
	}
	t.pos += i
	t.data = b[:i]
	if odd {
		var err error
		if t.scratch, err = appendText(t.scratch[:0], b[:i], false); err != nil {
			return false, err
		}
		t.data = t.scratch
	}
	if len(t.open) > 0 {
		return true, nil
	}
	if len(bytes.Trim(t.data, " \t\r\n")) > 0 {
		return false, fmt.Errorf("text %.40q outside all elements", t.data)
	}
	return false, nil
}

// cutText is how much of the end of b cannot be judged without what follows.
func cutText(b []byte) int {
	from := max(0, len(b)-maxReference)
	if i := bytes.LastIndexByte(b[from:], '&'); i >= 0 && bytes.IndexByte(b[from+i:], ';') < 0 {
		return len(b) - from - i
	}
	n := 0
	for n < 2 && n < len(b) && b[len(b)-1-n] == ']' {
		n++
	}
	if n == 0 && len(b) > 0 && b[len(b)-1] == '\r' {
		n = 1
	}
	return n
}

// section takes text of a CDATA section.
func (t *tokens) section() (bool, error) {
	b := t.buf[t.pos:]
	i := bytes.Index(b, []byte("]]>"))
	switch {
	case i >= 0:
		t.cdata = false
		t.pos += i + 3
	case len(b) < maxHeld || t.end:
		return false, t.more()
	default:
		i = len(b) - max(2, cutText(b))
		t.pos += i
	}
	t.data = b[:i]
	if bytes.IndexByte(t.data, '\r') >= 0 {
		t.scratch = appendLines(t.scratch[:0], t.data)
		t.data = t.scratch
	}
	return i > 0, nil
}

// declaration takes what begins with "<!".
func (t *tokens) declaration() error {
	const comment, cdata = "<!--", "<![CDATA["
	for len(t.buf)-t.pos < len(cdata) && !t.end {
		if err := t.more(); err != nil {
			return err
		}
	}
	b := t.buf[t.pos:]
	switch {
	case bytes.HasPrefix(b, []byte(comment)):
		t.pos += len(comment)
		if err := t.skipPast("--"); err != nil {
			return err
		}
		for t.pos == len(t.buf) {
			if err := t.more(); err != nil {
				return err
			}
		}
		if t.buf[t.pos] != '>' {
			return errors.New(`"--" in a comment`)
		}
		t.pos++
		return nil
	case bytes.HasPrefix(b, []byte(cdata)) && len(t.open) > 0:
		t.pos += len(cdata)
		t.cdata = true
		return nil
	case bytes.HasPrefix(b, []byte("<!DOCTYPE")):
		return errors.New("it declares a document type, which is not allowed")
	}
	return fmt.Errorf("%.12q is not allowed", b[:min(len(b), 12)])
}

func (t *tokens) skipPast(mark string) error {
	for {
		b := t.buf[t.pos:]
		if i := bytes.Index(b, []byte(mark)); i >= 0 {
			t.pos += i + len(mark)
			return nil
		}
		t.pos += max(0, len(b)-len(mark)+1)
		if err := t.more(); err != nil {
			return err
		}
	}
}

func (t *tokens) pop() {
	n := t.open[len(t.open)-1]
	t.open = t.open[:len(t.open)-1]
	t.local = localName(t.names[n:])
	t.names = t.names[:n]
}

// localName is a name without its prefix.
func localName(name []byte) []byte { return name[bytes.IndexByte(name, ':')+1:] }

func (t *tokens) endTag() error {
	if len(t.open) == 0 {
		return errors.New("an element ends that did not begin")
	}
	name := t.names[t.open[len(t.open)-1]:]
	for {
		b := t.buf[t.pos+2:]
		i := len(name)
		if len(b) >= i && !bytes.Equal(b[:i], name) {
			return fmt.Errorf("element %.40q ends as %.40q", name, b[:i])
		}
		for i < len(b) && class[b[i]]&space != 0 {
			i++
		}
		if i < len(b) {
			if b[i] != '>' {
				return fmt.Errorf("element %.40q ends as %.40q", name, b[:i+1])
			}
			t.pos += 2 + i + 1
			t.pop()
			return nil
		}
		if err := t.longer(); err != nil {
			return err
		}
	}
}

// longer reads on within a tag.
func (t *tokens) longer() error {
	if len(t.buf)-t.pos > maxTagBytes {
		return fmt.Errorf("a tag is longer than %d bytes", int(maxTagBytes))
	}
	return t.more()
}

func (t *tokens) startTag() error {
	for {
		n, err := t.parseTag(t.buf[t.pos:])
		if err != nil {
			return err
		}
		if n > 0 {
			t.pos += n
			return nil
		}
		if err := t.longer(); err != nil {
			return err
		}
	}
}
