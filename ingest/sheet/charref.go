package sheet

import (
	"bytes"
	"errors"
	"fmt"
	"strconv"
	"unicode/utf8"
)

// maxReference is how long a reference to a character may be.
const maxReference = 64

// appendText appends text of XML to dst: references resolved, line ends made
// "\n" (XML 1.0, 2.11). What ends a CDATA section is allowed in attributes only.
func appendText(dst, b []byte, attribute bool) ([]byte, error) {
	for i := 0; i < len(b); i++ {
		switch c := b[i]; c {
		case '&':
			end := bytes.IndexByte(b[i:min(len(b), i+maxReference)], ';')
			if end < 0 {
				return dst, fmt.Errorf("%.12q is no reference", b[i:min(len(b), i+12)])
			}
			r, ok := resolve(string(b[i+1 : i+end]))
			if !ok {
				return dst, fmt.Errorf("%.40q is no reference to a character", b[i:i+end+1])
			}
			dst = utf8.AppendRune(dst, r)
			i += end
		case ']':
			if !attribute && bytes.HasPrefix(b[i:], []byte("]]>")) {
				return dst, errors.New(`"]]>" in text`)
			}
			dst = append(dst, c)
		case '\r':
			if i+1 == len(b) || b[i+1] != '\n' {
				dst = append(dst, '\n')
			}
		default:
			dst = append(dst, c)
		}
	}
	return dst, nil
}

// appendLines appends text in which nothing but line ends means something.
func appendLines(dst, b []byte) []byte {
	for i, c := range b {
		switch {
		case c != '\r':
			dst = append(dst, c)
		case i+1 == len(b) || b[i+1] != '\n':
			dst = append(dst, '\n')
		}
	}
	return dst
}

// resolve knows the five entities of XML and characters by number.
func resolve(name string) (rune, bool) {
	switch name {
	case "amp":
		return '&', true
	case "lt":
		return '<', true
	case "gt":
		return '>', true
	case "quot":
		return '"', true
	case "apos":
		return '\'', true
	}
	if len(name) < 2 || name[0] != '#' {
		return 0, false
	}
	digits, base := name[1:], 10
	if digits[0] == 'x' {
		digits, base = digits[1:], 16
	}
	n, err := strconv.ParseUint(digits, base, 32) // takes no sign
	if err != nil {
		return 0, false
	}
	ok := n >= 0x20 && n <= 0xD7FF || n == '\t' || n == '\n' || n == '\r' ||
		n >= 0xE000 && n <= 0xFFFD || n >= 0x10000 && n <= utf8.MaxRune
	return rune(n), ok
}
