package sheet

import (
	"archive/zip"
	"errors"
	"fmt"
	"io"
	"os"
	"strings"
)

// Limits on the archive around a workbook.
const (
	maxDirectoryBytes = 4 << 20
	maxParts          = 20e3
	// What unpacks to more than ratio times its size is no table: the row
	// numbers alone keep rows of empty cells below a tenth of it. Small parts
	// may be as monotonous as they like.
	maxRatio       = 200
	ratioFromBytes = 16 << 20
)

// packed is the archive of a workbook.
type packed struct {
	file  *os.File
	size  int64
	parts map[string]*zip.File // by lower-case name without leading slash
}

func openArchive(name string) (*packed, error) {
	f, err := os.Open(name)
	if err != nil {
		return nil, err
	}
	p := &packed{file: f, parts: map[string]*zip.File{}}
	if err := p.list(); err != nil {
		f.Close()
		return nil, err
	}
	return p, nil
}

func (p *packed) list() error {
	st, err := p.file.Stat()
	if err != nil {
		return err
	}
	p.size = st.Size()
	at := &rationed{r: p.file, left: maxDirectoryBytes}
	z, err := zip.NewReader(at, p.size)
	switch {
	case err == nil:
	case errors.Is(err, errManyParts):
		return tooManyParts()
	case errors.Is(err, zip.ErrFormat), errors.Is(err, io.ErrUnexpectedEOF), errors.Is(err, io.EOF):
		return notAWorkbook("its archive is cut or damaged")
	case errors.Is(err, zip.ErrAlgorithm), errors.Is(err, zip.ErrChecksum):
		return notAWorkbook(err.Error())
	default:
		return err
	}
	at.free = true
	if len(z.File) > maxParts {
		return tooManyParts()
	}
	for _, f := range z.File {
		p.parts[partKey(f.Name)] = f
	}
	return nil
}

func (p *packed) part(name string) *zip.File { return p.parts[partKey(name)] }

func partKey(name string) string {
	return strings.ToLower(strings.TrimLeft(strings.ReplaceAll(name, `\`, "/"), "/"))
}

var errManyParts = errors.New("too many parts")

func tooManyParts() error {
	return &BadFile{"too-big", fmt.Sprintf("the workbook has more than %d parts", int(maxParts)), "copy the tables into a new workbook"}
}

// rationed bounds what listing an archive reads, since the list is held in
// memory and says itself how long it is.
type rationed struct {
	r    io.ReaderAt
	left int64
	free bool // listing is over
}

func (r *rationed) ReadAt(b []byte, off int64) (int, error) {
	if r.free { // set before any part is read, so safe to see from other goroutines
		return r.r.ReadAt(b, off)
	}
	if r.left -= int64(len(b)); r.left < 0 {
		return 0, errManyParts
	}
	return r.r.ReadAt(b, off)
}

// unpack opens a part; what it unpacks to is bounded whatever the directory says.
func (p *packed) unpack(name string, limit int64) (io.ReadCloser, error) {
	f := p.part(name)
	if f == nil {
		return nil, fmt.Errorf("part %.80q is missing", name)
	}
	if f.UncompressedSize64 > uint64(limit) {
		return nil, tooBig(name, limit)
	}
	r, err := f.Open()
	if err != nil {
		return nil, err
	}
	return &bounded{ReadCloser: r, limit: limit, packed: int64(min(f.CompressedSize64, uint64(p.size))), name: name}, nil
}

func tooBig(name string, limit int64) error {
	return &BadFile{"too-big", fmt.Sprintf("part %.80q unpacks to more than %d MB", name, limit>>20), "split the workbook, or save the table as .csv"}
}

// bounded stops what unpacks to more than a limit, or to far more than it is
// packed in.
type bounded struct {
	io.ReadCloser
	read, limit, packed int64
	name                string
}

func (b *bounded) Read(p []byte) (int, error) {
	n, err := b.ReadCloser.Read(p)
	b.read += int64(n)
	if b.read > b.limit {
		return 0, tooBig(b.name, b.limit)
	}
	if b.read > ratioFromBytes && b.read/maxRatio > b.packed {
		return 0, &BadFile{"too-big", fmt.Sprintf("part %.80q unpacks to more than %d times its size, as no table does", b.name, maxRatio),
			"open it in a spreadsheet program and save the table as .csv"}
	}
	return n, err
}
