package main

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"errors"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"syscall"
	"testing"
	"time"

	"kelvinrow/sql/dbtest"
)

// The tests of this package run the built binary, as a user does.

var binary string

func TestMain(m *testing.M) {
	dir, err := os.MkdirTemp("", "kelvinrow-test-")
	if err != nil {
		panic(err)
	}
	binary = filepath.Join(dir, "kelvinrow")
	if out, err := exec.Command("go", "build", "-o", binary, ".").CombinedOutput(); err != nil {
		panic(string(out))
	}
	status := m.Run()
	os.RemoveAll(dir)
	os.Exit(status)
}

// user is a user with a store of their own.
type user struct {
	t     *testing.T
	store string
	dir   string
}

func newUser(t *testing.T) *user {
	u := &user{t: t, store: dbtest.Dir(t), dir: t.TempDir()}
	t.Cleanup(func() {
		if status, out := u.run("store", "stop"); status != 0 {
			t.Errorf("store stop: %s", out)
		}
	})
	return u
}

func (u *user) command(args ...string) *exec.Cmd {
	cmd := exec.Command(binary, args...)
	cmd.Dir = u.dir
	for _, v := range os.Environ() {
		if !strings.HasPrefix(v, "DATABASE_URL=") {
			cmd.Env = append(cmd.Env, v)
		}
	}
	cmd.Env = append(cmd.Env, "KELVINROW_STORE="+u.store)
	return cmd
}

func (u *user) run(args ...string) (status int, output string) {
	u.t.Helper()
	out, err := u.command(args...).CombinedOutput()
	var exit *exec.ExitError
	if err != nil && !errors.As(err, &exit) {
		u.t.Fatal(err)
	}
	if exit != nil {
		status = exit.ExitCode()
	}
	return status, string(out)
}

func (u *user) must(want int, args ...string) string {
	u.t.Helper()
	status, out := u.run(args...)
	if status != want {
		u.t.Fatalf("kelvinrow %s: exit status %d, want %d\n%s", strings.Join(args, " "), status, want, out)
	}
	return out
}

func (u *user) write(name, content string) string {
	u.t.Helper()
	if err := os.WriteFile(filepath.Join(u.dir, name), []byte(content), 0o644); err != nil {
		u.t.Fatal(err)
	}
	return name
}

func (u *user) stopped() {
	u.t.Helper()
	if out := u.must(0, "store", "status"); !strings.Contains(out, "stopped") {
		u.t.Errorf("after the command: %s", out)
	}
}

// office converts with LibreOffice, the second program that reads our workbook.
func office(t *testing.T, file, to string) string {
	t.Helper()
	if os.Getenv("KELVINROW_WITHOUT_OFFICE") == "1" {
		t.Skip("KELVINROW_WITHOUT_OFFICE=1: the workbook is not opened by a second program")
	}
	dir := t.TempDir()
	cmd := exec.Command("soffice", "-env:UserInstallation=file://"+filepath.Join(dir, "profile"), "--headless", "--convert-to", to, "--outdir", dir, file)
	if out, err := cmd.CombinedOutput(); err != nil {
		t.Fatalf("soffice: %v\n%s (install LibreOffice: apt-get install libreoffice-calc; or set KELVINROW_WITHOUT_OFFICE=1)", err, out)
	}
	return dir
}

// table reads a sheet that LibreOffice wrote as CSV: its rows by building, with
// columns by header.
func table(t *testing.T, path string) map[string]map[string]string {
	t.Helper()
	f, err := os.Open(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.FieldsPerRecord = -1
	rows, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var header []string
	out := map[string]map[string]string{}
	for _, row := range rows {
		if header == nil {
			for _, c := range row {
				if c == "Year built" {
					header = row
				}
			}
			continue
		}
		line := map[string]string{}
		for i, c := range row {
			if i < len(header) {
				line[header[i]] = c
			}
		}
		if id := line["Building"]; id != "" {
			out[id] = line
		}
	}
	if len(out) == 0 {
		t.Fatalf("%s: no buildings", path)
	}
	return out
}

func number(t *testing.T, row map[string]string, column string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(row[column], 64)
	if err != nil {
		t.Fatalf("column %q: %v", column, err)
	}
	return v
}

// explained is the part of the explanation that the workbook shows too.
type explained struct {
	HeatingNeed float64 `json:"heating_need_kwh_a"`
	Delivered   float64 `json:"delivered_kwh_a"`
	Loss        struct {
		Wall float64 `json:"wall"`
	} `json:"loss_by_path_kwh_a"`
	Measures []struct {
		Measure  string  `json:"measure"`
		Applies  bool    `json:"applies"`
		Saving   float64 `json:"saving_kwh_a"`
		Cost     float64 `json:"cost"`
		Money    float64 `json:"money_a"`
		NPV      float64 `json:"npv"`
		CO2      float64 `json:"co2_kg_a"`
		Quantity float64 `json:"quantity"`
	} `json:"measures"`
}

func (u *user) explain(id string, args ...string) (e explained) {
	u.t.Helper()
	cmd := u.command(append([]string{"explain", id, "--json"}, args...)...)
	out, err := cmd.Output()
	if err != nil {
		u.t.Fatal(err)
	}
	if err := json.Unmarshal(out, &e); err != nil {
		u.t.Fatal(err)
	}
	return e
}

func TestWholeJob(t *testing.T) {
	t.Parallel()
	u := newUser(t)
	out := u.must(0, "demo", "out", "--buildings", "80")
	u.stopped()
	for _, want := range []string{"Read ", "set aside", "Loss by path", "Outside wall insulation", filepath.Join(u.dir, "out", "ranked.xlsx")} {
		if !strings.Contains(out, want) {
			t.Errorf("the summary does not say %q:\n%s", want, out)
		}
	}
	if strings.Contains(out, "\r") {
		t.Error("progress is shown in a pipe")
	}
	if n := strings.Count(out, "\n"); n > 45 {
		t.Errorf("the summary has %d lines: not one screen", n)
	}
	ranked := filepath.Join(u.dir, "out", "ranked.xlsx")

	sheets := office(t, ranked, "csv:Text - txt - csv (StarCalc):44,34,76,1,,0,false,false,false,false,false,-1")
	all, err := filepath.Glob(filepath.Join(sheets, "*.csv"))
	if err != nil {
		t.Fatal(err)
	}
	for _, path := range all {
		content, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		for _, bad := range []string{"#REF!", "#NAME?", "#VALUE!", "#DIV/0!", "#NUM!", "Err:5"} {
			if bytes.Contains(content, []byte(bad)) {
				t.Errorf("%s shows %s", filepath.Base(path), bad)
			}
		}
	}
	buildings := table(t, filepath.Join(sheets, "ranked-Buildings.csv"))
	walls := table(t, filepath.Join(sheets, "ranked-Outside wall insulation.csv"))
	checked := 0
	for id, row := range walls {
		if checked == 6 {
			break
		}
		checked++
		e := u.explain(id, "--portfolio", "demo")
		// The workbook rounds energy to a thousandth.
		near(t, id+" need", number(t, buildings[id], "Heating need (kWh/a)"), e.HeatingNeed, 1e-3)
		near(t, id+" delivered", number(t, buildings[id], "Delivered for heating and hot water (kWh/a)"), e.Delivered, 1e-3)
		near(t, id+" wall", number(t, buildings[id], "Walls"), e.Loss.Wall, 1e-3)
		for _, m := range e.Measures {
			if m.Measure != "outside-wall-insulation" {
				continue
			}
			near(t, id+" saving", number(t, row, "Saving (kWh/a)"), m.Saving, 1e-3)
			near(t, id+" CO2", number(t, row, "CO₂ saved (kg/a)"), m.CO2, 1e-3)
			// Money is recalculated by LibreOffice from rounded energy.
			near(t, id+" cost", number(t, row, "Cost (EUR)"), m.Cost, 1)
			near(t, id+" money", number(t, row, "Money saved (EUR/a)"), m.Money, 0.01)
			near(t, id+" NPV", number(t, row, "Net present value (EUR)"), m.NPV, 1)
		}
	}
	if checked == 0 {
		t.Fatal("nothing was compared")
	}

	pdf := office(t, ranked, "pdf")
	content, err := os.ReadFile(filepath.Join(pdf, "ranked.pdf"))
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.HasPrefix(content, []byte("%PDF")) || len(content) < 50_000 {
		t.Errorf("the workbook prints as %d bytes", len(content))
	}

	// Loading again changes nothing; ranking again with another number of workers
	// gives the same numbers.
	before := u.explain("B-0002", "--portfolio", "demo")
	u.must(0, "demo", "out", "--buildings", "80")
	if after := u.explain("B-0002", "--portfolio", "demo"); !equal(before, after) {
		t.Error("loading the same files again changed a building")
	}
	u.must(0, "rank", "--portfolio", "demo", "-o", "again.xlsx", "--workers", "1")
	var runs []map[string]any
	cmd := u.command("runs", "--portfolio", "demo", "--json")
	listed, err := cmd.Output()
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(listed, &runs); err != nil {
		t.Fatal(err)
	}
	if len(runs) != 3 || runs[0]["Inputs"] != runs[2]["Inputs"] {
		t.Errorf("runs: %s", listed)
	}
}

func equal(a, b explained) bool {
	x, _ := json.Marshal(a) // plain numbers
	y, _ := json.Marshal(b)
	return bytes.Equal(x, y)
}

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if math.Abs(got-want) > tolerance {
		t.Errorf("%s: the workbook says %.10g, explain %.10g", what, got, want)
	}
}

const good = "id;use;year built;floor area (m2);ventilation\nA-1;terraced house;1930;95;natural\nA-2;school;1972;2400;extract fan\n"

func TestBadInput(t *testing.T) {
	t.Parallel()
	u := newUser(t)
	u.write("good.csv", good)
	for _, c := range []struct {
		name, file, content string
		want                []string
	}{
		{"empty file", "empty.xlsx", "", []string{"empty.xlsx", "empty"}},
		{"no workbook", "letter.xlsx", "Dear Sir, here is our list.", []string{"letter.xlsx"}},
		{"old binary or encrypted", "locked.xlsx", "\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + strings.Repeat("\x00", 600), []string{"locked.xlsx"}},
		{"no header", "bare.csv", "1;2;3\n4;5;6\n", []string{"bare.csv"}},
		{"no id", "anonymous.csv", "use;year built;floor area (m2)\nschool;1970;900\n", []string{"anonymous.csv", "building id"}},
		{"row without id", "hole.csv", good + ";hall;1950;300;natural\n", []string{"hole.csv", "row 4", "column A"}},
		{"negative area", "minus.csv", good + "A-3;hall;1950;-300;natural\n", []string{"minus.csv", "row 4", "column D", "negative"}},
		{"text in a number", "word.csv", good + "A-3;hall;1950;large;natural\n", []string{"word.csv", "row 4", "column D", "large"}},
		{"duplicate id", "twice.csv", good + "A-1;hall;1950;300;natural\n", []string{"twice.csv", "row 4", "A-1", "row 2"}},
	} {
		out := u.must(3, "screen", u.write(c.file, c.content), "good.csv", "-o", "r.xlsx", "--portfolio", c.name)
		for _, w := range c.want {
			if !strings.Contains(out, w) {
				t.Errorf("%s: the message does not say %q:\n%s", c.name, w, out)
			}
		}
		if strings.Contains(out, "panic") {
			t.Errorf("%s: %s", c.name, out)
		}
		if e := u.explain("A-1", "--portfolio", c.name); e.HeatingNeed <= 0 {
			t.Errorf("%s: the good rows are not there", c.name)
		}
	}
	u.stopped()
}

func TestUsage(t *testing.T) {
	t.Parallel()
	u := newUser(t)
	u.write("good.csv", good)
	for _, args := range [][]string{
		{"screen"}, {"fly"}, {"rank", "--by", "beauty"}, {"screen", "good.csv", "--workers", "many"},
		{"load", "good.csv", "--kind", "certain"}, {"screen", "good.csv", "-o", "r.txt"}, {"explain"},
		{"screen", "good.csv", "-o", "nowhere/r.xlsx"},
	} {
		if status, out := u.run(args...); status != 2 || strings.Count(out, "\n") > 2 {
			t.Errorf("kelvinrow %s: exit status %d, want 2 and one line\n%s", strings.Join(args, " "), status, out)
		}
	}
	for _, args := range [][]string{
		{"--help"}, {"screen", "--help"}, {"demo", "--help"}, {"inspect", "--help"}, {"load", "--help"}, {"rank", "--help"},
		{"explain", "--help"}, {"runs", "--help"}, {"store", "--help"},
	} {
		if out := u.must(0, args...); !strings.Contains(out, "Example") {
			t.Errorf("kelvinrow %s shows no example", strings.Join(args, " "))
		}
	}
	u.must(1, "screen", "missing.xlsx")
	u.must(1, "rank", "--portfolio", "nobody")
	u.must(0, "load", "good.csv")
	if out := u.must(1, "explain", "a-1"); !strings.Contains(out, "A-1") {
		t.Errorf("no near id is named: %s", out)
	}
	if out := u.must(1, "screen", "good.csv", "--climate", "Atlantis"); !strings.Contains(out, "Harrowmark") {
		t.Errorf("the climates are not listed: %s", out)
	}
	if out := u.must(0, "inspect", "good.csv", "--columns-out", "columns.txt"); !strings.Contains(out, "floor_area") {
		t.Errorf("inspect does not say what the columns are: %s", out)
	}
	u.must(0, "inspect", "good.csv", "--columns", "columns.txt")
	u.stopped()
}

func TestInterruptLeavesTheStoreAsItWas(t *testing.T) {
	t.Parallel()
	u := newUser(t)
	u.write("good.csv", good)
	u.must(0, "load", "good.csv")
	var big strings.Builder
	big.WriteString("id;use;year built;floor area (m2);ventilation\n")
	for i := range 60_000 {
		big.WriteString("B-" + strconv.Itoa(i) + ";school;1972;2400;extract fan\n")
	}
	u.write("big.csv", big.String())
	for _, signal := range []os.Signal{os.Interrupt, syscall.SIGKILL} {
		cmd := u.command("load", "big.csv")
		if err := cmd.Start(); err != nil {
			t.Fatal(err)
		}
		time.Sleep(700 * time.Millisecond) // the server is up, the rows are on their way
		if err := cmd.Process.Signal(signal); err != nil {
			t.Fatal(err)
		}
		if err := cmd.Wait(); err == nil {
			t.Skip("this machine loads 60,000 rows before it can be interrupted")
		}
		if status, out := u.run("explain", "B-5"); status != 1 || !strings.Contains(out, "no building") {
			t.Errorf("after %v: explain B-5: %d %s", signal, status, out)
		}
		u.must(0, "explain", "A-1")
		u.stopped()
	}
}

// TestRegisters screens open building registers that nobody here wrote.
func TestRegisters(t *testing.T) {
	t.Parallel()
	u := newUser(t)
	for _, c := range []struct {
		file      string
		status    int
		buildings string
	}{
		{"county-house-sales.csv", 0, "21 420 estimated"}, // 21,597 sales of 21,420 houses
		{"city-a-energy-benchmarking.csv", 0, " estimated"},
		{"uci-energy-efficiency.csv", 1, "nothing in the files given could be used"}, // headers that say nothing
	} {
		path, err := filepath.Abs(filepath.Join("../../../shared/data/registers", c.file))
		if err != nil {
			t.Fatal(err)
		}
		if _, err := os.Stat(path); err != nil {
			t.Skipf("open data is not here: %v", err)
		}
		out := u.must(c.status, "screen", path, "-o", "r.xlsx", "--portfolio", c.file, "--top", "50")
		if !strings.Contains(out, c.buildings) {
			t.Errorf("%s: the summary does not say %q:\n%s", c.file, c.buildings, out)
		}
	}
}

func TestReaderThatGoesAway(t *testing.T) {
	t.Parallel()
	u := newUser(t)
	u.write("good.csv", good)
	cmd := u.command("screen", "good.csv")
	out, err := cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	out.Close()
	if err := cmd.Wait(); err != nil {
		t.Errorf("the command ends with %v", err)
	}
	u.stopped()
}
