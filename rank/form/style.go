package form

import "github.com/xuri/excelize/v2"

// The colours of the ranked workbook, and two greys: of what cannot be changed
// and of what is known.
const (
	ink    = "22303A"
	muted  = "56656E"
	accent = "17505C"
	pale   = "E4EDEF"
	edge   = "9FB0B7"
	fixedG = "F1F3F4"
	knownG = "DCE1E4"
	white  = "FFFFFF"

	font = "Arial"
)

const (
	textFormat = "@"
	dateFormat = "yyyy-mm-dd"
	// numberFormat keeps numbers off the edge: an indent would do, but LibreOffice
	// prints it in some rows and not in others.
	numberFormat = "General_)"
)

type look struct {
	size          float64
	bold, italic  bool
	color, fill   string
	format, align string
	valign        string
	wrap, box     bool
	open          bool // may be changed
}

// styles makes each look once.
type styles struct {
	f    *excelize.File
	made map[look]int
	err  error
}

// newStyles also sets the font that the widths of columns are counted in.
func newStyles(f *excelize.File) (*styles, error) {
	if err := f.SetDefaultFont(font); err != nil {
		return nil, err
	}
	size := 10.0
	base := f.Styles.Fonts.Font[0]
	base.Scheme, base.Sz.Val = nil, &size // a scheme's font would win over the name
	return &styles{f: f, made: map[look]int{}}, nil
}

func (s *styles) id(l look) int {
	if id, ok := s.made[l]; ok {
		return id
	}
	st := &excelize.Style{
		Font:       &excelize.Font{Family: font, Size: l.size, Bold: l.bold, Italic: l.italic, Color: l.color},
		Alignment:  &excelize.Alignment{Horizontal: l.align, Vertical: l.valign, WrapText: l.wrap},
		Protection: &excelize.Protection{Locked: !l.open},
	}
	if l.fill != "" {
		st.Fill = excelize.Fill{Type: "pattern", Pattern: 1, Color: []string{l.fill}}
	}
	switch l.format {
	case "":
	case textFormat:
		st.NumFmt = 49
	default:
		st.CustomNumFmt = &l.format
	}
	if l.box {
		for _, side := range []string{"left", "right", "top", "bottom"} {
			st.Border = append(st.Border, excelize.Border{Type: side, Color: edge, Style: 1})
		}
	}
	id, err := s.f.NewStyle(st)
	if err != nil && s.err == nil {
		s.err = err
	}
	s.made[l] = id
	return id
}

func (s *styles) title() int {
	return s.id(look{size: 16, bold: true, color: accent, valign: "center"})
}
func (s *styles) about() int { return s.id(look{size: 9, color: muted, valign: "center"}) }
func (s *styles) label() int {
	return s.id(look{size: 9, color: ink, bold: true, align: "right", valign: "center"})
}
func (s *styles) band() int {
	return s.id(look{size: 9, bold: true, color: accent, fill: pale, valign: "center"})
}
func (s *styles) hint() int {
	return s.id(look{size: 8, italic: true, color: muted, wrap: true, valign: "top"})
}
func (s *styles) head() int {
	return s.id(look{size: 9, bold: true, color: white, fill: accent, wrap: true, valign: "center", box: true})
}
func (s *styles) locked() int {
	return s.id(look{size: 9, color: muted, fill: fixedG, format: textFormat, wrap: true, valign: "center", box: true})
}
func (s *styles) known(format, align string) int {
	return s.id(look{size: 9, color: ink, fill: knownG, format: format, align: align, wrap: align == "left", valign: "center", box: true, open: true})
}
func (s *styles) open(format, align string) int {
	return s.id(look{size: 9, color: ink, format: format, align: align, wrap: align == "left", valign: "center", box: true, open: true})
}
func (s *styles) heading() int {
	return s.id(look{size: 11, bold: true, color: accent, wrap: true, valign: "bottom"})
}
func (s *styles) prose() int {
	return s.id(look{size: 10, color: ink, wrap: true, valign: "top"})
}
