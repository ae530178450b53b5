package sheet

// differences are all between this reader and the other library on the
// workbooks of other libraries' tests, with who is right and why. Where it says
// so, a third program, LibreOffice 7, was asked by hand.
var differences = []struct {
	file  string
	cells int    // how many differ, a book or sheet that is not read counting one
	such  string // one of them
	right string // which reader: this or the other
	why   string
}{
	{"poi/53105.xlsx", 1,
		`Sheet1: not read: sheet "Sheet1" has more than 4096 columns; remove what does not belong to the table and save again`,
		"other", "the sheet has 16384 filled columns, all of which LibreOffice shows; no table of buildings has, and the limit is meant"},
	{"poi/sample-beta.xlsx", 1,
		"other not opened: expected element <calcChain> in name space http://schemas.openxmlformats.org/spreadsheetml/2006/main but have http://schemas.microsoft.com/office/excel/2006/2",
		"this", "the parts carry the names of a beta of the format; the sheets are whole, and LibreOffice opens them"},
	{"poi/xlsx-corrupted.xlsx", 1,
		"other not opened: EOF",
		"other", "the part that says where the workbook's is holds the word CORRUPTED, and LibreOffice refuses the file too; here it is looked for in its usual place. All that is read is whole, so no row is lost"},
	{"sheetjs/crlf.xlsx", 1,
		`Sheet1 B2: "abc\r\ndef", other "abc_x000D_\ndef"`,
		"this", "_x000D_ is the format's escape of a carriage return (ECMA-376 Part 1, 22.9.2.19), here in the cached text of a formula with CHAR(13)"},
	{"sheetjs/formula_stress_test.xlsx", 1,
		`Text C38: "\a7\a", other "_x0007_7_x0007_"`,
		"this", `the formula is CHAR(7)&"7"&CHAR(7), so the escapes stand for the bell; LibreOffice keeps them too`},
	{"sheetjs/wtf_path.xlsx", 18,
		`SheetJS A3: "foo    bar", other ""`,
		"this", "the parts lie in a folder of another name, where the other does not find the shared texts; LibreOffice shows them as here"},
	{"sheetjs/xlsx-stream-d-date-cell.xlsx", 1,
		`Sheet1 B5: "2014-02-14", other "2014-02-14T08:27:48.765Z"`,
		"this", "an ISO date is kept to the day, as dates by number are; the day is the one that LibreOffice shows"},
}
