package progress

import (
	"bytes"
	"os"
	"strings"
	"testing"
)

func TestSilentWhereNobodyLooks(t *testing.T) {
	r, w, err := os.Pipe()
	if err != nil {
		t.Fatal(err)
	}
	defer r.Close()
	p := New(w, false)
	p.Stage("reading", 3)
	p.Add(1)
	p.Rows(10)
	p.Done()
	w.Close()
	var got bytes.Buffer
	if _, err := got.ReadFrom(r); err != nil {
		t.Fatal(err)
	}
	if got.Len() > 0 {
		t.Errorf("wrote %q into a pipe", got.String())
	}
}

func TestLineIsRewrittenAndCleared(t *testing.T) {
	var out bytes.Buffer
	p := &Progress{w: &out, width: 60}
	p.Stage("estimating", 4)
	p.Add(4)
	p.Done()
	s := out.String()
	if strings.Contains(s, "\n") {
		t.Errorf("%q breaks the line", s)
	}
	if !strings.Contains(s, "estimating [########################] 4/4") {
		t.Errorf("%q does not show the end", s)
	}
	if last := s[strings.LastIndex(strings.TrimSuffix(s, "\r"), "\r")+1:]; strings.TrimSpace(last) != "" {
		t.Errorf("the line is left as %q", last)
	}
	for _, line := range strings.Split(s, "\r") {
		if len(line) >= p.width {
			t.Errorf("%q is wider than the terminal", line)
		}
	}
}
