package workbook

import (
	"archive/zip"
	"bytes"
	"context"
	"errors"
	"fmt"
	"hash/crc32"
	"io"
	"io/fs"
	"os"
	"regexp"
	"runtime"
	"slices"
	"strings"
	"time"

	"github.com/klauspost/compress/flate"
	"golang.org/x/sync/errgroup"
)

// compression is the flate level: files are a fifth smaller than at the fastest
// level for a third more processor time (measured on 20,000 buildings).
const compression = 6

// spoolLimit is how much compressed data of a part stays in memory.
const spoolLimit = 4 << 20

// archive is what excelize writes its parts to instead of a plain zip writer. It
// fills in the rows of the sheets as they are compressed, several sheets at a
// time, and puts the parts into the file in a fixed order. The rows of a large
// workbook are never held in memory or on disk uncompressed.
type archive struct {
	ctx   context.Context
	w     io.Writer
	time  time.Time
	pages map[string]*page // by part name
	parts []*part
}

type part struct {
	name    string
	content bytes.Buffer // as excelize wrote it

	packed spool
	crc    uint32
	size   uint64
}

func (a *archive) Create(name string) (io.Writer, error) {
	p := &part{name: name}
	a.parts = append(a.parts, p)
	return &p.content, nil
}

func (a *archive) AddFS(fs.FS) error { return errors.ErrUnsupported }

// Close compresses all parts and writes the file.
func (a *archive) Close() (err error) {
	slices.SortFunc(a.parts, func(x, y *part) int {
		// Readers that look at the first entry expect the content types there.
		if d := order(x.name) - order(y.name); d != 0 {
			return d
		}
		return strings.Compare(x.name, y.name)
	})
	defer func() {
		for _, p := range a.parts {
			p.packed.remove()
		}
	}()
	for _, p := range a.parts {
		if p.name == contentTypes {
			p.sortDefaults()
		}
	}
	g, ctx := errgroup.WithContext(a.ctx)
	g.SetLimit(runtime.GOMAXPROCS(0))
	for _, p := range a.parts {
		g.Go(func() error {
			if err := p.pack(ctx, a.pages[p.name]); err != nil {
				return fmt.Errorf("write %s: %w", p.name, err)
			}
			return nil
		})
	}
	if err := g.Wait(); err != nil {
		return err
	}
	z := zip.NewWriter(a.w)
	for _, p := range a.parts {
		h := &zip.FileHeader{
			Name: p.name, Method: zip.Deflate,
			CRC32: p.crc, UncompressedSize64: p.size, CompressedSize64: uint64(p.packed.size),
		}
		//lint:ignore SA1019 CreateRaw writes these two and takes no notice of Modified
		h.ModifiedDate, h.ModifiedTime = dosTime(a.time)
		w, err := z.CreateRaw(h)
		if err != nil {
			return err
		}
		if err := p.packed.copyTo(w); err != nil {
			return err
		}
	}
	return z.Close()
}

// dosTime is a time as zip entries hold it: whole days since 1980, every second
// second.
func dosTime(t time.Time) (day, second uint16) {
	year := min(max(t.Year(), 1980), 2107)
	return uint16(t.Day() + int(t.Month())<<5 + (year-1980)<<9),
		uint16(t.Second()/2 + t.Minute()<<5 + t.Hour()<<11)
}

const contentTypes = "[Content_Types].xml"

var defaultType = regexp.MustCompile(`<Default [^>]*>\s*</Default>`)

// sortDefaults puts the types by extension into a fixed order: excelize adds those
// of pictures in the order of a map.
func (p *part) sortDefaults() {
	xml := p.content.Bytes()
	var found []string
	for _, m := range defaultType.FindAll(xml, -1) {
		found = append(found, string(m))
	}
	slices.Sort(found)
	i := 0
	sorted := defaultType.ReplaceAllFunc(xml, func([]byte) []byte {
		i++
		return []byte(found[i-1])
	})
	p.content = *bytes.NewBuffer(sorted)
}

func order(name string) int {
	switch {
	case name == contentTypes:
		return 0
	case strings.HasPrefix(name, "_rels/"):
		return 1
	}
	return 2
}

// pack compresses a part; pg, if not nil, gives the rows of the sheet.
func (p *part) pack(ctx context.Context, pg *page) error {
	f, err := flate.NewWriter(&p.packed, compression)
	if err != nil {
		return err
	}
	m := &meter{w: f}
	if pg == nil {
		_, err = m.Write(p.content.Bytes())
	} else {
		err = pg.splice(ctx, m, p.content.Bytes())
	}
	if err != nil {
		return err
	}
	p.content.Reset()
	p.crc, p.size = m.crc, m.size
	return f.Close()
}

// splice writes a sheet with the page's own rows and links in place of those
// excelize has.
func (pg *page) splice(ctx context.Context, w io.Writer, sheet []byte) error {
	head, rest, ok := bytes.Cut(sheet, []byte("<sheetData>"))
	if !ok {
		return errors.New("sheet without rows element")
	}
	_, tail, ok := bytes.Cut(rest, []byte("</sheetData>"))
	if !ok {
		return errors.New("sheet without end of rows")
	}
	if _, err := fmt.Fprintf(w, "%s<sheetData>", head); err != nil {
		return err
	}
	r := &rows{ctx: ctx, w: w}
	if _, err := w.Write(pg.top.Bytes()); err != nil {
		return err
	}
	if pg.body != nil {
		pg.body(r)
	}
	if err := r.close(); err != nil {
		return err
	}
	if _, err := io.WriteString(w, "</sheetData>"); err != nil {
		return err
	}
	before, after, ok := bytes.Cut(tail, []byte("</hyperlinks>"))
	if pg.links != nil && ok {
		if _, err := w.Write(before); err != nil {
			return err
		}
		l := &links{w: w, left: maxLinks}
		pg.links(l)
		if err := l.flush(); err != nil {
			return err
		}
		_, err := fmt.Fprintf(w, "</hyperlinks>%s", after)
		return err
	}
	_, err := w.Write(tail)
	return err
}

// maxLinks keeps a sheet below the 65,530 links that Excel opens.
const maxLinks = 65000

// links appends links within the workbook.
type links struct {
	w    io.Writer
	buf  []byte
	left int
	err  error
}

func (l *links) add(col, row int, target string) {
	if l.left == 0 {
		return
	}
	l.left--
	l.buf = append(l.buf, `<hyperlink ref="`...)
	l.buf = append(l.buf, cellName(col, row)...)
	l.buf = append(l.buf, `" location="`...)
	l.buf = appendEscaped(l.buf, target)
	l.buf = append(l.buf, `"/>`...)
	if len(l.buf) >= flushAt {
		l.err = errors.Join(l.err, l.flush())
	}
}

func (l *links) flush() error {
	if l.err == nil {
		_, l.err = l.w.Write(l.buf)
	}
	l.buf = l.buf[:0]
	return l.err
}

// meter counts and sums what passes through it.
type meter struct {
	w    io.Writer
	crc  uint32
	size uint64
}

func (m *meter) Write(b []byte) (int, error) {
	n, err := m.w.Write(b)
	m.crc = crc32.Update(m.crc, crc32.IEEETable, b[:n])
	m.size += uint64(n)
	return n, err
}

// spool holds compressed data: a little in memory, more in a temporary file.
type spool struct {
	buf  bytes.Buffer
	file *os.File
	size int64
}

func (s *spool) Write(b []byte) (int, error) {
	s.size += int64(len(b))
	if s.file == nil && s.buf.Len()+len(b) > spoolLimit {
		f, err := os.CreateTemp("", "kelvinrow-part-*")
		if err != nil {
			return 0, err
		}
		s.file = f
	}
	s.buf.Write(b)
	if s.file != nil && s.buf.Len() >= flushAt {
		if _, err := s.buf.WriteTo(s.file); err != nil {
			return 0, err
		}
	}
	return len(b), nil
}

func (s *spool) copyTo(w io.Writer) error {
	if s.file != nil {
		if _, err := s.file.Seek(0, io.SeekStart); err != nil {
			return err
		}
		if _, err := io.Copy(w, s.file); err != nil {
			return err
		}
	}
	_, err := s.buf.WriteTo(w)
	return err
}

func (s *spool) remove() {
	if s.file != nil {
		_ = s.file.Close()
		_ = os.Remove(s.file.Name())
		s.file = nil
	}
}
