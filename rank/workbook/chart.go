package workbook

import "github.com/xuri/excelize/v2"

// bars is a native chart with horizontal bars of one series, each with its
// number, so that it needs neither a value axis nor colours to be read.
type bars struct {
	title, alt         string
	name               string // cell that names the series
	categories, values string // ranges
	color, format      string
	width, height      int // pixels
}

// The widths of the columns below it must be set before.
func (b *book) bars(pg *page, cell string, c bars) error {
	gap := uint(45)
	no := false
	return b.f.AddChart(pg.name, cell, &excelize.Chart{
		Type: excelize.Bar,
		Series: []excelize.ChartSeries{{
			Name: c.name, Categories: c.categories, Values: c.values,
			Fill:              excelize.Fill{Type: "pattern", Pattern: 1, Color: []string{c.color}},
			DataLabelPosition: excelize.ChartDataLabelsPositionOutsideEnd,
			DataLabel:         excelize.ChartDataLabel{Font: excelize.Font{Family: font, Size: 9, Color: ink}},
		}},
		Title: excelize.ChartTitle{Paragraph: []excelize.RichTextRun{{
			Text: c.title, Font: &excelize.Font{Family: font, Size: 11, Bold: true, Color: ink},
		}}},
		Legend:     excelize.ChartLegend{Position: "none"},
		VaryColors: &no,
		GapWidth:   &gap,
		XAxis:      excelize.ChartAxis{ReverseOrder: true, Font: excelize.Font{Family: font, Size: 9, Color: ink}},
		YAxis:      excelize.ChartAxis{None: true},
		PlotArea:   excelize.ChartPlotArea{ShowVal: true, NumFmt: excelize.ChartNumFmt{CustomNumFmt: c.format}},
		Border:     excelize.LineOptions{Type: excelize.LineNone},
		Dimension:  excelize.ChartDimension{Width: uint(c.width), Height: uint(c.height)},
		Format: excelize.GraphicOptions{
			AltText: c.alt, OffsetX: 6, OffsetY: 4,
		},
	})
}
