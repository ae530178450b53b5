package workbook

import (
	"strings"

	"github.com/xuri/excelize/v2"
)

// The palette: one dark green-blue for structure and energy, one ochre for
// money and cautions, greys. The two differ in lightness as well as in hue, and
// nothing is said by colour alone.
const (
	ink       = "22303A"
	muted     = "56656E"
	accent    = "17505C"
	pale      = "E4EDEF"
	line      = "C5D0D4"
	ochre     = "A85F24"
	barFill   = "B5D3D8"
	inputFill = "FFF4D6"
	inputEdge = "C9A94E"
	white     = "FFFFFF"
)

// font is one that every spreadsheet program has or has a twin of the same
// widths for.
const (
	font     = "Arial"
	fontSize = 10
)

// Number formats.
const (
	asText   = "@" // stays text when the cell is edited
	whole    = "#,##0"
	plain    = "0"
	one      = "#,##0.0"
	two      = "#,##0.00"
	three    = "0.000"
	four     = "0.0000"
	percent  = "0 %"
	percent1 = "0.0 %"
	general  = "General"
)

// look is how a cell looks. Each look becomes one style of the workbook.
type look struct {
	format        string
	size          float64 // 0 is the ordinary size
	bold, italic  bool
	link          bool
	color, fill   string
	align, valign string
	wrap          bool
	indent        int
	edge          string // colour of a line below; with box around
	box           bool
}

// styles makes each look once.
type styles struct {
	f    *excelize.File
	made map[look]int
	err  error
}

func newStyles(f *excelize.File) (*styles, error) {
	if err := f.SetDefaultFont(font); err != nil {
		return nil, err
	}
	base := f.Styles.Fonts.Font[0]
	base.Scheme = nil // else the theme's font wins over the name
	size := float64(fontSize)
	base.Sz.Val = &size
	return &styles{f: f, made: map[look]int{}}, nil
}

func (s *styles) id(l look) int {
	if id, ok := s.made[l]; ok {
		return id
	}
	st := &excelize.Style{Font: &excelize.Font{
		Family: font, Size: fontSize, Bold: l.bold, Italic: l.italic, Color: ink,
	}}
	if l.size > 0 {
		st.Font.Size = l.size
	}
	if l.color != "" {
		st.Font.Color = l.color
	}
	if l.link {
		st.Font.Underline, st.Font.Color = "single", accent
	}
	if l.fill != "" {
		st.Fill = excelize.Fill{Type: "pattern", Pattern: 1, Color: []string{l.fill}}
	}
	switch l.format {
	case "":
	case asText:
		st.NumFmt = 49
	default:
		st.CustomNumFmt = &l.format
	}
	valign := l.valign
	if valign == "" {
		valign = "center"
	}
	st.Alignment = &excelize.Alignment{Horizontal: l.align, Vertical: valign, WrapText: l.wrap, Indent: l.indent}
	if l.edge != "" {
		sides := "bottom"
		if l.box {
			sides = "left right top bottom"
		}
		for side := range strings.FieldsSeq(sides) {
			st.Border = append(st.Border, excelize.Border{Type: side, Color: l.edge, Style: 1})
		}
	}
	id, err := s.f.NewStyle(st)
	if err != nil && s.err == nil {
		s.err = err
	}
	s.made[l] = id
	return id
}

// The looks that several sheets share.

func (s *styles) title() int    { return s.id(look{size: 20, bold: true, color: accent}) }
func (s *styles) subtitle() int { return s.id(look{color: muted}) }
func (s *styles) heading() int {
	return s.id(look{size: 13, bold: true, color: accent, edge: accent, valign: "bottom"})
}
func (s *styles) headingRest() int { return s.id(look{edge: accent}) }
func (s *styles) prose() int       { return s.id(look{wrap: true, valign: "top"}) }
func (s *styles) backLink() int    { return s.id(look{link: true, size: 9, fill: pale}) }

// head is the header cell of a table.
func (s *styles) head() int {
	return s.id(look{bold: true, color: white, fill: accent, wrap: true, size: 9, valign: "center"})
}

func (s *styles) headRight() int {
	return s.id(look{bold: true, color: white, fill: accent, wrap: true, size: 9, align: "right", indent: 1})
}

// band names a group of columns above the header.
func (s *styles) band() int { return s.id(look{bold: true, color: accent, fill: pale, size: 9}) }

func (s *styles) text() int     { return s.id(look{format: asText, edge: line}) }
func (s *styles) textLink() int { return s.id(look{format: asText, edge: line, link: true}) }
func (s *styles) words() int    { return s.id(look{edge: line}) }
func (s *styles) wrapped() int {
	return s.id(look{edge: line, wrap: true, size: 9, align: "left", indent: 1})
}
func (s *styles) value(format string) int {
	return s.id(look{format: padded(format), edge: line, align: "right"})
}

// padded keeps numbers, and words in their place, off the right edge. An indent
// would do, but LibreOffice 7.4 prints it in some rows and not in others.
func padded(format string) string {
	switch format {
	case "", asText:
		return `@_)`
	case general:
		return `General_)`
	}
	return format + "_);-" + format + "_);" + format + "_);@_)"
}

// alarm is a word that must not be overlooked.
func (s *styles) alarm() int { return s.id(look{format: asText, edge: line, bold: true, color: ochre}) }

// input is a cell that formulas use and a reader may change.
func (s *styles) input(format string) int {
	return s.id(look{format: padded(format), fill: inputFill, edge: inputEdge, box: true, align: "right"})
}
