package sheet

import "bytes"

// fastCell takes a cell that is written as nearly all are, without a detour by
// way of tokens: <c r="B7" s="1" t="s"><v>12</v></c>, with a formula or the
// text itself within, or with nothing. Where anything is otherwise, it takes
// nothing and says so, and the tokens tell what is right.
func (s *scanner) fastCell() (bool, error) {
	if !s.inRow || s.inCell || s.skip > 0 || s.closing || s.cdata || s.depth() > maxDepth/2 {
		return false, nil
	}
	b := s.buf[s.pos:]
	if len(b) < 3 || b[0] != '<' || b[1] != 'c' || class[b[2]]&inName != 0 {
		return false, nil
	}
	c := simpleCell{column: s.cell.column + 1}
	n := c.tag(b, s.row.Number)
	if n == 0 || c.column <= s.cell.column || c.column >= sheetColumns {
		return false, nil
	}
	if !c.empty {
		m := c.content(b[n:])
		if m == 0 {
			return false, nil
		}
		n += m
	}
	s.pos += n
	s.cell.column = c.column
	if len(c.text) == 0 {
		return true, nil
	}
	return true, s.put(c.kind, c.style, c.text)
}

// simpleCell is a cell that is written as nearly all are.
type simpleCell struct {
	column, style int
	kind          kind
	empty         bool
	seen          uint8  // attributes, r and the letters after it
	text          []byte // within the buffer
}

// tag takes the start tag, as the other methods do returning how much they
// took, 0 when they could not.
func (c *simpleCell) tag(b []byte, row int) int {
	i := 2
	for i+4 < len(b) && b[i] == ' ' && b[i+2] == '=' && b[i+3] == '"' {
		name := b[i+1]
		i += 4
		from := i
		for i < len(b) && b[i] != '"' {
			if b[i] == '&' || b[i] == '<' {
				return 0
			}
			i++
		}
		if !c.attribute(name, b[from:i], row) {
			return 0
		}
		i++
	}
	switch {
	case i+1 < len(b) && b[i] == '>':
		return i + 1
	case i+1 < len(b) && b[i] == '/' && b[i+1] == '>':
		c.empty = true
		return i + 2
	}
	return 0
}

// attribute takes one of three attributes, each once.
func (c *simpleCell) attribute(name byte, v []byte, row int) bool {
	if name < 'r' || name > 't' || c.seen&(1<<(name-'r')) != 0 {
		return false
	}
	c.seen |= 1 << (name - 'r')
	switch name {
	case 'r':
		col, n, ok := splitReference(v)
		if !ok || n != row || col < c.column {
			return false
		}
		c.column = col
	case 's':
		c.style, _ = digits(v)
	case 't':
		c.kind = kindOf(v)
	}
	return true
}

// content takes what is between the tags, and the end tag.
func (c *simpleCell) content(b []byte) int {
	i := 0
	if bytes.HasPrefix(b, []byte("<f>")) {
		n := plainText(b[3:])
		if i = 3 + n; !bytes.HasPrefix(b[i:], []byte("</f>")) {
			return 0
		}
		i += len("</f>")
	}
	end := "</c>"
	switch rest := b[i:]; {
	case bytes.HasPrefix(rest, []byte("<v>")):
		i += len("<v>")
		n := plainText(b[i:])
		c.text = b[i : i+n]
		i += n
		end = "</v></c>"
		if c.kind == inlined {
			return 0
		}
	case bytes.HasPrefix(rest, []byte("<is><t")):
		i += len("<is><t")
		if bytes.HasPrefix(b[i:], []byte(` xml:space="preserve"`)) {
			i += len(` xml:space="preserve"`)
		}
		if i == len(b) || b[i] != '>' {
			return 0
		}
		i++
		n := plainText(b[i:])
		c.text = b[i : i+n]
		i += n
		end = "</t></is></c>"
		c.kind = inlined
	}
	if !bytes.HasPrefix(b[i:], []byte(end)) {
		return 0
	}
	return i + len(end)
}

// plainText is the length of the text at the front of b as far as it means
// itself.
func plainText(b []byte) int {
	i := 0
	for i < len(b) && class[b[i]]&oddText == 0 {
		i++
	}
	return i
}
