package archtest

import (
	"bytes"
	"encoding/json"
	"errors"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

type pkg struct {
	ImportPath   string
	Dir          string
	Doc          string
	Imports      []string
	TestImports  []string
	XTestImports []string
	GoFiles      []string
	TestGoFiles  []string
	XTestGoFiles []string
}

func packages(t *testing.T) []pkg {
	t.Helper()
	cmd := exec.Command("go", "list", "-json", "kelvinrow/...")
	cmd.Stderr = os.Stderr
	out, err := cmd.Output()
	if err != nil {
		t.Fatal(err)
	}
	var all []pkg
	d := json.NewDecoder(bytes.NewReader(out))
	for {
		var p pkg
		if err := d.Decode(&p); errors.Is(err, io.EOF) {
			return all
		} else if err != nil {
			t.Fatal(err)
		}
		all = append(all, p)
	}
}

// may says which of our packages a package may import. The first rule that
// matches the importing package counts; "..." stands for anything below.
var may = []struct {
	from string
	to   []string
}{
	{"cmd/...", []string{"..."}},
	// Leaves.
	{"estimate/building", nil},
	{"ingest/finding", nil},
	{"estimate/climate", []string{"estimate/solar"}},
	{"estimate/solar", nil},
	{"estimate/refcase", nil},
	{"estimate/fabric", nil},
	{"estimate/ground", nil},
	{"estimate/moisture", nil},
	{"estimate/finance", nil},
	{"estimate/geometry", []string{"estimate/building"}},
	{"estimate/airflow", []string{"estimate/climate"}},
	{"estimate/state", []string{"estimate/building", "estimate/climate", "estimate/fabric", "estimate/ground"}},
	{"estimate/result", []string{"estimate/building", "estimate/state"}},
	{"estimate/caution", []string{"estimate/result"}},
	{"estimate/balance", []string{"estimate/airflow", "estimate/climate", "estimate/state"}},
	{"estimate/archetype", []string{"estimate/building", "estimate/climate", "estimate/fabric"}},
	{"estimate/measure", []string{"estimate/archetype", "estimate/building", "estimate/caution", "estimate/fabric", "estimate/result", "estimate/state"}},
	{"estimate", []string{"estimate/..."}},
	{"ingest/assumption", []string{"ingest/finding", "ingest/sheet", "estimate/archetype", "estimate/building", "estimate/climate", "estimate/fabric"}},
	{"ingest/...", []string{"ingest/...", "ingest", "estimate/building"}},
	{"ingest", []string{"ingest/...", "estimate/building"}},
	{"rank/form", []string{"ingest", "ingest/check", "ingest/header", "estimate/archetype", "estimate/building"}}, // what it writes, ingest reads
	{"rank/...", []string{"rank", "rank/...", "ingest/finding", "estimate/archetype", "estimate/building", "estimate/caution", "estimate/climate", "estimate/fabric", "estimate/finance", "estimate/measure", "estimate/result", "estimate/state"}},
	{"rank", []string{"estimate/building", "estimate/result", "estimate/state"}},
	{"sql/...", []string{"sql/...", "estimate/building", "estimate/result", "ingest/finding"}},
}

func matches(pattern, path string) bool {
	if prefix, ok := strings.CutSuffix(pattern, "..."); ok {
		return strings.HasPrefix(path, prefix)
	}
	return pattern == path
}

func TestImportsGoOneWay(t *testing.T) {
	for _, p := range packages(t) {
		from := strings.TrimPrefix(p.ImportPath, "kelvinrow/")
		var allowed []string
		known := false
		for _, r := range may {
			if matches(r.from, from) {
				allowed, known = r.to, true
				break
			}
		}
		if !known {
			t.Errorf("%s is in no rule: say what it may import", from)
		}
		for _, i := range p.Imports {
			to, ours := strings.CutPrefix(i, "kelvinrow/")
			if !ours {
				continue
			}
			ok := false
			for _, a := range allowed {
				ok = ok || matches(a, to)
			}
			if !ok {
				t.Errorf("%s must not import %s", from, to)
			}
		}
	}
}

// only says where a library may be used outside tests. A library that is not
// listed may be used nowhere: a dependency is a decision, not a habit.
var only = []struct {
	library string
	places  []string
}{
	{"github.com/jackc/pgx/v5", []string{"sql/..."}},
	{"github.com/klauspost/compress", []string{"rank/workbook", "cmd/internal/demo", "cmd/internal/bench"}}, // deflates several times faster
	{"github.com/spf13/cobra", []string{"cmd/internal/cli"}},
	{"github.com/xuri/excelize/v2", []string{"ingest/sheet", "ingest/mend", "ingest/assumption", "rank/form", "rank/workbook", "cmd/internal/demo"}},
	{"golang.org/x/sync", []string{"estimate", "ingest/...", "rank/...", "sql/..."}},
	{"golang.org/x/term", []string{"cmd/internal/progress"}},
	{"golang.org/x/text", []string{"ingest/...", "cmd/internal/demo"}},
}

func TestLibrariesStayInTheirPlace(t *testing.T) {
	for _, p := range packages(t) {
		from := strings.TrimPrefix(p.ImportPath, "kelvinrow/")
		for _, i := range p.Imports {
			if host, _, _ := strings.Cut(i, "/"); !strings.Contains(host, ".") {
				continue // the standard library, or ours
			}
			listed, ok := false, false
			for _, o := range only {
				if i != o.library && !strings.HasPrefix(i, o.library+"/") {
					continue
				}
				listed = true
				for _, place := range o.places {
					ok = ok || matches(place, from)
				}
			}
			switch {
			case !listed:
				t.Errorf("%s imports %s, which is in no rule: say where it may be used, and why it is needed", from, i)
			case !ok:
				t.Errorf("%s must not import %s", from, i)
			}
		}
	}
}

// The tests of what computes need no database either.
func TestComputingIsTestedWithoutDatabase(t *testing.T) {
	for _, p := range packages(t) {
		from := strings.TrimPrefix(p.ImportPath, "kelvinrow/")
		if matches("sql/...", from) || matches("cmd/...", from) {
			continue
		}
		for _, i := range append(append([]string{}, p.TestImports...), p.XTestImports...) {
			if strings.HasPrefix(i, "kelvinrow/sql/") || strings.HasPrefix(i, "kelvinrow/cmd/") || i == "database/sql" {
				t.Errorf("a test of %s must not import %s", from, i)
			}
		}
	}
}

func TestEveryPackageSaysWhatItIsFor(t *testing.T) {
	for _, p := range packages(t) {
		name := filepath.Base(p.ImportPath)
		if !strings.HasPrefix(p.Doc, "Package "+name+" ") && !strings.HasPrefix(p.Doc, "Command "+name+" ") {
			t.Errorf("%s: the package comment does not begin with its name: %q", p.ImportPath, p.Doc)
		}
	}
}

func TestNoFileIsTooLong(t *testing.T) {
	const limit = 500 // lines: beyond that a file has more than one subject
	for _, p := range packages(t) {
		for _, name := range append(append(append([]string{}, p.GoFiles...), p.TestGoFiles...), p.XTestGoFiles...) {
			content, err := os.ReadFile(filepath.Join(p.Dir, name))
			if err != nil {
				t.Fatal(err)
			}
			if n := bytes.Count(content, []byte("\n")); n > limit {
				t.Errorf("%s/%s has %d lines: split it by subject", p.ImportPath, name, n)
			}
		}
	}
}

// foreign is what must not stand in any file: where it was built, and where its
// parts were fetched.
var foreign = regexp.MustCompile(`(^|[^\w.])/(work|root|home)/\w|proxy\.golang\.org|deb\.debian\.org|registry\.npmjs|sum\.golang\.org`)

func TestNoFileNamesAMachine(t *testing.T) {
	out, err := exec.Command("git", "-C", "../../..", "ls-files", "-z").Output()
	if err != nil {
		t.Skipf("no git checkout here: %v", err)
	}
	for _, name := range strings.Split(strings.TrimRight(string(out), "\x00"), "\x00") {
		content, err := os.ReadFile(filepath.Join("../../..", name))
		if err != nil {
			continue // deleted, not yet committed
		}
		if bytes.IndexByte(content, 0) >= 0 || strings.HasSuffix(name, "arch_test.go") {
			continue
		}
		for i, line := range strings.Split(string(content), "\n") {
			if m := foreign.FindString(line); m != "" {
				t.Errorf("%s:%d: %q must not be in the project", name, i+1, m)
			}
		}
	}
}
