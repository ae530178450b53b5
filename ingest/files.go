package ingest

import (
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"kelvinrow/ingest/finding"
)

// extensions are those of tables, and of spreadsheets that cannot be read: that
// one lies in a folder must be said.
var extensions = []string{".xlsx", ".xlsm", ".csv", ".tsv", ".txt", ".xls", ".xlsb", ".ods"}

// Expand lists the files meant by paths: folders stand for the spreadsheets in
// them, patterns for what they match. What lies there and is left out comes out
// as notes, but for hidden files.
func Expand(paths []string) (files []string, skipped []finding.Finding, err error) {
	add := func(p string) {
		if !slices.Contains(files, p) {
			files = append(files, p)
		}
	}
	for _, p := range paths {
		st, err := os.Stat(p)
		var found []string
		switch {
		case err == nil && st.IsDir():
			entries, err := os.ReadDir(p) // sorted by name
			if err != nil {
				return nil, nil, err
			}
			for _, e := range entries {
				found = append(found, filepath.Join(p, e.Name()))
			}
		case err == nil:
			add(p)
			continue
		case strings.ContainsAny(p, "*?["):
			var gerr error
			if found, gerr = filepath.Glob(p); gerr != nil {
				return nil, nil, fmt.Errorf("pattern %s: %w", p, gerr)
			}
		default:
			return nil, nil, err
		}
		n, named := 0, slices.Contains(paths, p)
		for _, f := range found {
			why, fix := leftOut(f)
			switch {
			case why == "":
				add(f)
				n++
			case why != hidden && !(named && slices.Contains(paths, f)):
				skipped = append(skipped, finding.Finding{Severity: finding.Note, Check: finding.FileSkipped, File: filepath.Base(f), Text: "the file is not read: " + why, Fix: fix})
			}
		}
		if n == 0 {
			what := "no spreadsheet in folder " + p
			if err != nil {
				what = "no spreadsheet matches " + p
			}
			for i, s := range skipped[max(0, len(skipped)-min(3, len(found))):] {
				what += map[bool]string{true: "; ", false: ", "}[i == 0] + s.File + " is left out"
			}
			return nil, nil, fmt.Errorf("%s", what)
		}
	}
	return files, skipped, nil
}

// hidden files are left out without a word.
const hidden = "it is hidden"

// leftOut says why a file found in a folder or by a pattern is not read, and
// what to do if it should be.
func leftOut(path string) (why, fix string) {
	name := filepath.Base(path)
	ext := filepath.Ext(name)
	st, err := os.Stat(path)
	switch {
	case strings.HasPrefix(name, "."):
		return hidden, ""
	case err != nil:
		return err.Error(), ""
	case st.IsDir():
		return "it is a folder within the folder", "name it to have it read"
	case strings.HasPrefix(name, "~$"):
		return "it only says that " + strings.TrimPrefix(name, "~$") + " is open in a spreadsheet program", "save that file there first if it was changed"
	case !slices.Contains(extensions, strings.ToLower(ext)):
		return "it is no spreadsheet by its name", ""
	case Mended(name):
		return "it holds rows to fix", "mend it and name it to have it read"
	}
	return "", ""
}

// Mended reports whether a file of this name holds rows that came out to be
// fixed. It adds to what its source and earlier files of its name say.
func Mended(name string) bool {
	return strings.HasSuffix(strings.TrimSuffix(filepath.Base(name), filepath.Ext(name)), "-to-fix")
}

// Names gives each of the files of one command the name by which it is known:
// its base name, with as many folders before it as tell it from the others.
func Names(paths []string) []string {
	parts := make([][]string, len(paths))
	for i, p := range paths {
		if abs, err := filepath.Abs(p); err == nil {
			p = abs
		}
		parts[i] = strings.Split(filepath.ToSlash(p), "/")
	}
	tail := func(i, n int) string { return strings.Join(parts[i][max(0, len(parts[i])-n):], "/") }
	names := make([]string, len(paths))
	for i := range paths {
		for n := 1; ; n++ {
			names[i] = tail(i, n)
			alone := true
			for j := range paths {
				alone = alone && (i == j || !strings.EqualFold(tail(j, n), names[i]))
			}
			if alone || n >= len(parts[i]) {
				break
			}
		}
	}
	return names
}
