package sheet

import (
	"bufio"
	"context"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"os"
	"strings"
	"unicode/utf8"

	"golang.org/x/text/encoding/charmap"
	"golang.org/x/text/encoding/unicode"
	"golang.org/x/text/transform"
)

// text is a delimited text file: one sheet without a name.
type text struct {
	path      string
	content   *Content
	delimiter rune
}

func openText(path string, c *Content) (Book, error) {
	t := &text{path: path, content: c}
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	head, err := io.ReadAll(io.LimitReader(t.decode(f), 64<<10))
	if err != nil {
		return nil, fmt.Errorf("read %s: %w", path, err)
	}
	if strings.TrimSpace(string(head)) == "" {
		return nil, &BadFile{"empty-file", "the file holds nothing but blanks", "send it again"}
	}
	t.delimiter = SniffDelimiter(string(head))
	return t, nil
}

func (t *text) decode(r io.Reader) io.Reader {
	if order, ok := t.content.utf16(); ok {
		e := unicode.LittleEndian
		if order == binary.BigEndian {
			e = unicode.BigEndian
		}
		return transform.NewReader(r, unicode.UTF16(e, unicode.UseBOM).NewDecoder())
	}
	if t.content.utf8 {
		return transform.NewReader(r, unicode.UTF8BOM.NewDecoder())
	}
	return charmap.Windows1252.NewDecoder().Reader(r)
}

func (t *text) Sheets() []Info   { return []Info{{}} }
func (t *text) Modified() string { return "" }
func (t *text) Delimiter() rune  { return t.delimiter }
func (t *text) Close() error     { return nil }

func (t *text) Verify(ctx context.Context, i int, visit func(*Row)) ([]Merge, error) {
	return nil, t.Rows(ctx, i, func(r *Row) error { visit(r); return nil })
}

func (t *text) Rows(ctx context.Context, _ int, visit func(*Row) error) error {
	f, err := os.Open(t.path)
	if err != nil {
		return err
	}
	defer f.Close()
	p := newParser(t.decode(f), t.delimiter)
	var row Row
	for {
		if p.record%512 == 0 {
			if err := ctx.Err(); err != nil {
				return err
			}
		}
		fields, err := p.next()
		if err == io.EOF {
			return nil
		}
		if err != nil {
			var bad *BadFile
			if errors.As(err, &bad) {
				return err
			}
			return malformed("", p.record, err)
		}
		if p.record == 1 && len(fields) == 1 && strings.HasPrefix(fields[0], "sep=") {
			continue
		}
		row.Number = p.record
		row.Cells = row.Cells[:0]
		for _, s := range fields {
			k := Text
			if s == "" {
				k = Empty
			}
			row.Cells = append(row.Cells, Cell{Kind: k, Text: s})
		}
		if row.Blank() {
			continue
		}
		if err := visit(&row); err != nil {
			return err
		}
	}
}

// parser splits delimited text as RFC 4180 has it. Quotes inside an unquoted
// field are taken as they are, as spreadsheet programs do.
type parser struct {
	r         *bufio.Reader
	delimiter rune
	first     byte // of delimiter
	record    int  // 1-based number of the last record, blank ones counted
	fields    []string
	buf       []byte
}

func newParser(r io.Reader, delimiter rune) *parser {
	return &parser{r: bufio.NewReaderSize(r, 64<<10), delimiter: delimiter, first: string(delimiter)[0]}
}

// run takes what means itself in one go: as much as is buffered before one of
// two bytes or a carriage return.
func (p *parser) run(a, b byte) {
	in, _ := p.r.Peek(p.r.Buffered()) // which is there
	i := 0
	for i < len(in) && in[i] != a && in[i] != b && in[i] != '\r' {
		i++
	}
	if i > 0 {
		p.buf = append(p.buf, in[:i]...)
		_, _ = p.r.Discard(i) // which is there
	}
}

// A quote that is never closed would swallow the rest of the file unseen.
const maxFieldLines, maxFieldBytes = 200, 256 << 10

func (p *parser) next() ([]string, error) {
	p.fields = p.fields[:0]
	p.buf = p.buf[:0]
	quoted, wasQuoted, any := false, false, false
	lines := 0
	field := func() error {
		if len(p.fields) >= maxColumns {
			return &BadFile{"too-wide", fmt.Sprintf("row %d has more than %d columns", p.record+1, maxColumns), "check the separator and send the table again"}
		}
		p.fields = append(p.fields, string(p.buf))
		p.buf = p.buf[:0]
		wasQuoted = false
		lines = 0
		return nil
	}
	unclosed := func() error {
		return &BadFile{"open-quote", fmt.Sprintf("a quotation mark opened in row %d is not closed", p.record+1), "close or remove it and send the file again"}
	}
	for {
		c, _, err := p.r.ReadRune()
		if err == io.EOF {
			if quoted {
				return nil, unclosed()
			}
			if !any {
				return nil, io.EOF
			}
			if err := field(); err != nil {
				return nil, err
			}
			p.record++
			return p.fields, nil
		}
		if err != nil {
			return nil, err
		}
		any = true
		switch {
		case quoted && c == '"':
			if q, _, err := p.r.ReadRune(); err == nil && q == '"' {
				p.buf = append(p.buf, '"')
			} else {
				if err == nil {
					_ = p.r.UnreadRune() // a rune was just read
				}
				quoted = false
			}
		case quoted:
			if c == '\n' {
				lines++
			}
			p.buf = utf8.AppendRune(p.buf, c)
			p.run('"', '\n')
			if lines > maxFieldLines || len(p.buf) > maxFieldBytes {
				return nil, unclosed()
			}
		case c == '"' && len(p.buf) == 0 && !wasQuoted:
			quoted, wasQuoted = true, true
		case c == p.delimiter:
			if err := field(); err != nil {
				return nil, err
			}
		case c == '\r' || c == '\n':
			if c == '\r' {
				if n, _, err := p.r.ReadRune(); err == nil && n != '\n' {
					_ = p.r.UnreadRune() // a rune was just read
				}
			}
			if err := field(); err != nil {
				return nil, err
			}
			p.record++
			return p.fields, nil
		default:
			p.buf = utf8.AppendRune(p.buf, c)
			p.run(p.first, '\n')
			if len(p.buf) > maxFieldBytes {
				return nil, &BadFile{"too-wide", fmt.Sprintf("row %d holds a cell of more than %d characters", p.record+1, maxFieldBytes), "check the file and send it again"}
			}
		}
	}
}

// SniffDelimiter finds the separator under which most records of head have the
// same number of fields, more than one; a comma if none has.
func SniffDelimiter(head string) rune {
	if rest, ok := strings.CutPrefix(head, "sep="); ok {
		if d, _ := utf8.DecodeRuneInString(rest); d != utf8.RuneError && d != '\n' && d != '\r' {
			return d
		}
	}
	best, bestScore := ',', 0
	for _, d := range []rune{';', '\t', ',', '|'} {
		counts := make([]int, 0, 64)
		for p := newParser(strings.NewReader(head), d); len(counts) < 100; {
			f, err := p.next()
			if err != nil {
				break
			}
			if len(f) == 1 && f[0] == "" {
				continue
			}
			counts = append(counts, len(f))
		}
		if len(counts) > 2 {
			counts = counts[:len(counts)-1] // the last may be cut
		}
		// Records that agree on a width weigh by it.
		of := map[int]int{}
		score := 0
		for _, n := range counts {
			if n > 1 {
				of[n]++
				score = max(score, of[n]*100+n)
			}
		}
		if score > bestScore {
			best, bestScore = d, score
		}
	}
	return best
}
