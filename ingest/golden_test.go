package ingest

import (
	"context"
	"flag"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"sort"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"kelvinrow/ingest/finding"
)

var update = flag.Bool("update", false, "write the golden dumps anew: go test ./ingest -run Golden -update")

const goldens = "testdata/golden"

// dump says in a few lines how a file was read, without quoting it.
func dump(r *Report) string {
	var b strings.Builder
	fmt.Fprintf(&b, "== %s\n", r.File)
	for i, s := range r.Sheets {
		if s.Skipped != "" {
			fmt.Fprintf(&b, "sheet %d: not read: %s\n", i+1, unquoted(s.Skipped))
			continue
		}
		fmt.Fprintf(&b, "sheet %d: header %d, data from %d, %d rows, %d used, %d set aside\n", i+1, s.HeaderRow, s.DataFrom, s.Rows, s.Used, s.SetAside)
		for _, c := range s.Columns {
			if c.Field == "" {
				continue
			}
			unit := ""
			if c.Unit != "" {
				unit = " in " + c.Unit
			}
			fmt.Fprintf(&b, "  %s %s%s: %d\n", c.Letter, c.Field, unit, c.Count)
		}
	}
	n := map[string]int{}
	for _, f := range r.Findings {
		n[fmt.Sprintf("%d %s %s", finding.Error-f.Severity, f.Severity, f.Check)]++
	}
	var keys []string
	for k := range n {
		keys = append(keys, k)
	}
	sort.Strings(keys)
	for _, k := range keys {
		fmt.Fprintf(&b, "%s: %d\n", k[2:], n[k])
	}
	return b.String()
}

var reQuoted = regexp.MustCompile(`"[^"]*"`)

// unquoted leaves out what a text quotes from a file.
func unquoted(s string) string { return reQuoted.ReplaceAllString(s, `"…"`) }

// How files that nobody here wrote are read must change on purpose only. The
// dumps are of our own reading: they notice change, they prove nothing.
func TestGoldenReadingOfOpenData(t *testing.T) {
	if _, err := os.Stat(shared); err != nil {
		t.Skipf("open data is not here: %v", err)
	}
	byFolder := map[string][]string{}
	err := filepath.WalkDir(shared, func(path string, d fs.DirEntry, err error) error {
		if ext := filepath.Ext(path); err == nil && !d.IsDir() && (ext == ".xlsx" || ext == ".csv") {
			dir := filepath.Base(filepath.Dir(path))
			byFolder[dir] = append(byFolder[dir], path)
		}
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	var folders []string
	for dir := range byFolder {
		folders = append(folders, dir)
	}
	sort.Strings(folders)
	if len(folders) < 4 {
		t.Fatalf("only folders %v", folders)
	}
	if *update {
		if err := os.MkdirAll(goldens, 0o755); err != nil {
			t.Fatal(err)
		}
	}
	have, err := os.ReadDir(goldens)
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range have {
		if !slices.Contains(folders, strings.TrimSuffix(e.Name(), ".txt")) {
			t.Errorf("%s is of no folder of the open data: remove it", e.Name())
		}
	}
	for _, dir := range folders {
		t.Run(dir, func(t *testing.T) {
			t.Parallel()
			files := byFolder[dir]
			sort.Strings(files)
			var b strings.Builder
			for _, path := range files {
				r, err := Inspect(context.Background(), path, Options{Today: "2026-12-01"})
				if err != nil {
					t.Fatal(err)
				}
				b.WriteString(dump(r))
			}
			golden := filepath.Join(goldens, dir+".txt")
			if *update {
				if err := os.WriteFile(golden, []byte(b.String()), 0o644); err != nil {
					t.Fatal(err)
				}
				return
			}
			want, err := os.ReadFile(golden)
			if err != nil {
				t.Fatalf("%v: look at the dump, and write it with -update", err)
			}
			if d := cmp.Diff(strings.Split(string(want), "\n"), strings.Split(b.String(), "\n")); d != "" {
				t.Errorf("files of %s are read otherwise (-before +now); if that is better, write it with -update:\n%s", dir, d)
			}
		})
	}
}
