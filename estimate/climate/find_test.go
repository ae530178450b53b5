package climate

import (
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

func TestLoad(t *testing.T) {
	t.Parallel()
	dir := t.TempDir()
	good, bad := filepath.Join(dir, "Year.EPW"), filepath.Join(dir, "bad.epw")
	for path, text := range map[string]string{good: newMadeUp(true).String(), bad: "no weather\n"} {
		if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	for _, c := range []struct{ from, want string }{{good, "Testing Ground"}, {"stonelarch", "Stonelarch"}, {"", "Harrowmark"}} {
		got, err := Load(c.from)
		if err != nil || got.Name != c.want {
			t.Errorf("%q: %+v, %v", c.from, got, err)
		}
	}
	if _, err := Load(filepath.Join(dir, "none.epw")); !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("no file: %v", err)
	}
	if _, err := Load(bad); err == nil || !strings.HasPrefix(err.Error(), "weather file bad.epw: line 1: ") {
		t.Errorf("bad file: %v", err)
	}
	if _, err := Load("Nowhere"); err == nil || !strings.Contains(err.Error(), "Harrowmark, Ebbwhistle") {
		t.Errorf("unknown name: %v", err)
	}
}
