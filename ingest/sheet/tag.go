package sheet

import (
	"bytes"
	"errors"
	"fmt"
)

// Classes of bytes in XML.
const (
	space     = 1 << iota
	nameStart // of a name; whatever is not ASCII may be
	inName
	oddText // means more than itself in text
)

var class = func() (c [256]uint8) {
	for i := range c {
		switch b := byte(i); {
		case b >= 'a' && b <= 'z', b >= 'A' && b <= 'Z', b == '_', b == ':', b >= 0x80:
			c[i] = nameStart | inName
		case b >= '0' && b <= '9', b == '-', b == '.':
			c[i] = inName
		case b == ' ', b == '\t', b == '\n', b == '\r':
			c[i] = space
		}
	}
	for _, b := range []byte("<&]\r") {
		c[b] |= oddText
	}
	return c
}()

const maxAttributes = 1024

// parseTag takes the start tag at the front of b and returns its length, 0 if
// its end is not in b.
func (t *tokens) parseTag(b []byte) (int, error) {
	i := 1
	if class[b[i]]&nameStart == 0 {
		return 0, fmt.Errorf("%.12q is no tag", b[:min(len(b), 12)])
	}
	for i < len(b) && class[b[i]]&inName != 0 {
		i++
	}
	nameEnd := i
	t.attrs = t.attrs[:0]
	for refers := false; ; {
		before := i
		for i < len(b) && class[b[i]]&space != 0 {
			i++
		}
		if i == len(b) || b[i] == '/' && i+1 == len(b) {
			return 0, nil
		}
		t.closing = b[i] == '/' && b[i+1] == '>'
		if b[i] == '>' || t.closing {
			t.tag = b[:i]
			if refers {
				if err := t.checkReferences(); err != nil {
					return 0, err
				}
			}
			if t.closing {
				i++
			}
			return i + 1, t.push(b[1:nameEnd])
		}
		if i == before || class[b[i]]&nameStart == 0 {
			return 0, fmt.Errorf("tag %.40q goes on with %q", b[:before], b[i])
		}
		end, ref, err := t.parseAttribute(b, i)
		if end == 0 || err != nil {
			return 0, err
		}
		refers = refers || ref
		i = end
	}
}

// parseAttribute takes the attribute at b[i:] and returns its end, 0 if that is
// not in b.
func (t *tokens) parseAttribute(b []byte, i int) (end int, refers bool, err error) {
	a := attribute{name: i}
	for i < len(b) && class[b[i]]&inName != 0 {
		i++
	}
	a.nameEnd = i
	for i < len(b) && class[b[i]]&space != 0 {
		i++
	}
	if i < len(b) && b[i] != '=' {
		return 0, false, fmt.Errorf("attribute %.40q has no value", b[a.name:a.nameEnd])
	}
	for i++; i < len(b) && class[b[i]]&space != 0; {
		i++
	}
	if i >= len(b) {
		return 0, false, nil
	}
	quote := b[i]
	if quote != '"' && quote != '\'' {
		return 0, false, fmt.Errorf("attribute %.40q has no quotes", b[a.name:a.nameEnd])
	}
	i++
	for a.value = i; i < len(b) && b[i] != quote; i++ {
		if b[i] == '<' {
			return 0, false, fmt.Errorf("attribute %.40q holds a tag", b[a.name:a.nameEnd])
		}
		refers = refers || b[i] == '&'
	}
	if i == len(b) {
		return 0, false, nil
	}
	a.valueEnd = i
	if len(t.attrs) == maxAttributes {
		return 0, false, fmt.Errorf("a tag has more than %d attributes", maxAttributes)
	}
	t.attrs = append(t.attrs, a)
	return i + 1, refers, nil
}

func (t *tokens) push(name []byte) error {
	colon := bytes.IndexByte(name, ':')
	if colon >= 0 && (colon == 0 || colon == len(name)-1 || bytes.IndexByte(name[colon+1:], ':') >= 0) {
		return fmt.Errorf("%.40q is no name", name)
	}
	switch {
	case len(t.open) == 0 && t.rooted:
		return errors.New("it goes on after its end")
	case len(t.open) == maxDepth:
		return fmt.Errorf("elements lie more than %d deep in each other", maxDepth)
	}
	t.rooted = true
	t.open = append(t.open, len(t.names))
	t.names = append(t.names, name...)
	t.local = name[colon+1:]
	return nil
}

func (t *tokens) checkReferences() error {
	for _, a := range t.attrs {
		var err error
		if t.scratch, err = appendText(t.scratch[:0], t.tag[a.value:a.valueEnd], true); err != nil {
			return err
		}
	}
	return nil
}

// attr returns an attribute of the last start tag by its name without prefix,
// "" if there is none.
func (t *tokens) attr(local string) string {
	for _, a := range t.attrs {
		name := t.tag[a.name:a.nameEnd]
		if string(localName(name)) == local && !bytes.HasPrefix(name, []byte("xmlns:")) {
			t.scratch, _ = appendText(t.scratch[:0], t.tag[a.value:a.valueEnd], true) // checked with the tag
			return string(t.scratch)
		}
	}
	return ""
}
