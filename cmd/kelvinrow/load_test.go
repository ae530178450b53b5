package main

import (
	"encoding/json"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"kelvinrow/ingest/finding"
)

// What comes out must not come in again: its defaults would count as known.
func TestRankedWorkbookIsNoSource(t *testing.T) {
	t.Parallel()
	u := newUser(t)
	u.write("register.csv", good)
	u.must(0, "screen", "register.csv", "-o", "ranked.xlsx")
	before := u.explain("A-1")
	for _, given := range []string{".", "*.xlsx"} {
		status, out := u.run("load", given)
		if want := map[string]int{".": 0, "*.xlsx": 1}[given]; status != want || !strings.Contains(out, "ranked.xlsx: the file is a workbook that this program wrote") {
			t.Errorf("load %s: %d, %s", given, status, out)
		}
	}
	u.must(1, "inspect", "ranked.xlsx")
	u.must(1, "screen", "ranked.xlsx", "-o", "again.xlsx")
	if _, err := os.Stat(filepath.Join(u.dir, "again.xlsx")); err == nil {
		t.Error("a workbook was written although nothing could be read")
	}
	if after := u.explain("A-1"); !equal(before, after) {
		t.Error("loading the ranked workbook changed a building")
	}
	u.stopped()
}

func TestNothingUsableFails(t *testing.T) {
	t.Parallel()
	u := newUser(t)
	u.write("head.csv", "id;use;year built;floor area (m2);ventilation\n")
	u.write("letter.xlsx", "Dear Sir,")
	u.write("good.csv", good)
	for _, c := range []struct {
		file, want string
		beside     int // status with a good file beside it
	}{{"head.csv", "no row of a building", 0}, {"letter.xlsx", "no .xlsx workbook", 3}} {
		for _, verb := range []string{"load", "inspect"} {
			if out := u.must(1, verb, c.file); !strings.Contains(out, c.want) || !strings.Contains(out, "nothing in the files given could be used") {
				t.Errorf("%s %s: %s", verb, c.file, out)
			}
		}
		u.must(c.beside, "load", c.file, "good.csv", "--portfolio", c.file)
	}
	u.must(0, "load", "good.csv")
	u.must(0, "load", "good.csv") // known already is not nothing
	u.stopped()
}

func TestTakingBack(t *testing.T) {
	t.Parallel()
	u := newUser(t)
	u.write("r.csv", good)
	u.must(0, "load", "r.csv")
	first := u.explain("A-1")
	u.write("r.csv", strings.Replace(good, ";95;", ";120;", 1))
	if out := u.must(0, "load", "r.csv"); !strings.Contains(out, "takes the place of r.csv") {
		t.Errorf("a corrected file is taken without a word: %s", out)
	}
	if equal(first, u.explain("A-1")) {
		t.Fatal("the correction changed nothing")
	}
	if out := u.must(0, "load", "--list"); strings.Count(out, "r.csv") < 1 || !strings.Contains(out, "registered") {
		t.Errorf("--list: %s", out)
	}
	if out := u.must(0, "load", "--undo", "r.csv"); !strings.Contains(out, "Taken back   r.csv") || !strings.Contains(out, "Counts again r.csv") {
		t.Errorf("--undo: %s", out)
	}
	if !equal(first, u.explain("A-1")) {
		t.Error("the earlier version does not count again")
	}
	if out := u.must(1, "load", "--undo", "other.csv"); !strings.Contains(out, "no file other.csv was loaded") {
		t.Errorf("--undo of a file never loaded: %s", out)
	}
	u.must(0, "load", "r.csv")
	if out := u.must(0, "load", "--prune"); !strings.Contains(out, "1 earlier versions") {
		t.Errorf("--prune: %s", out)
	}
	u.must(2, "load", "--undo")
	u.must(2, "load", "--list", "r.csv")
	u.must(2, "load", "--undo", "--list", "r.csv")
	u.stopped()
}

func TestEveryFindingCanBeSeen(t *testing.T) {
	t.Parallel()
	u := newUser(t)
	text := "id;use;year built;floor area (m2);ventilation;n50\n"
	for i := range 30 {
		text += "A-" + string(rune('A'+i)) + ";school;1950;900;natural;99\n"
	}
	u.write("r.csv", text)
	for _, verb := range [][]string{{"inspect"}, {"load"}, {"screen", "--portfolio", "q", "-o", "r.xlsx"}} {
		run := append(append([]string{verb[0], "r.csv"}, verb[1:]...), "--all")
		out := u.must(0, run...)
		if n := strings.Count(out, "airtightness n50 99 1/h is outside"); n != 30 || strings.Contains(out, " more:") {
			t.Errorf("%v shows %d of 30: %s", run, n, out)
		}
	}
	u.write("r.csv", text+"B;hall;1960;100;natural;3\n")
	if out := u.must(0, "load", "r.csv"); !strings.Contains(out, "more: --all shows them") {
		t.Errorf("how to see the rest is not said: %s", out)
	}
	u.write("r.csv", text+"B;hall;1960;110;natural;3\n")
	for _, verb := range []string{"load", "screen"} {
		cmd := u.command(verb, "r.csv", "--json", "--portfolio", verb)
		out, err := cmd.Output()
		if err != nil {
			t.Fatal(err)
		}
		var got struct {
			Findings []finding.Finding
			Used     int
			Run      int
		}
		if err := json.Unmarshal(out, &got); err != nil {
			t.Fatalf("%s: %v\n%s", verb, err, out)
		}
		if got.Used != 31 || len(got.Findings) < 30 || (got.Run > 0) != (verb == "screen") {
			t.Errorf("%s: %d used, %d findings, run %d", verb, got.Used, len(got.Findings), got.Run)
		}
	}
	u.stopped()
}

// A contradiction between files loaded earlier stands in the workbook, too.
func TestContradictionsStandInTheWorkbook(t *testing.T) {
	t.Parallel()
	u := newUser(t)
	u.write("a.csv", good)
	u.write("b.csv", strings.Replace(good, ";95;", ";140;", 1))
	u.must(0, "load", "a.csv")
	if out := u.must(0, "load", "b.csv"); !strings.Contains(out, "building A-1: heated floor area 140 m2 in b.csv, row 2; 95 m2 in a.csv, row 2; b.csv is used") {
		t.Errorf("not said at load: %s", out)
	}
	u.must(0, "rank", "-o", "ranked.xlsx")
	f, err := excelize.OpenFile(filepath.Join(u.dir, "ranked.xlsx"))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := f.GetRows("Data issues")
	if err != nil {
		t.Fatal(err)
	}
	found := 0
	for _, r := range rows {
		if line := strings.Join(r, "|"); strings.Contains(line, "conflict") && strings.Contains(line, "140 m2 in b.csv") {
			found++
		}
	}
	if found != 1 {
		t.Errorf("the contradiction stands %d times on the sheet of data issues", found)
	}
	u.stopped()
}
