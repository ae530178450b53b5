package progress

import (
	"bytes"
	"os"
	"slices"
	"strings"
	"sync"
	"testing"
	"unicode/utf8"
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

func TestLongNamesDoNotWrapOrBreakLetters(t *testing.T) {
	var out bytes.Buffer
	p := &Progress{w: &out, width: 24}
	p.Stage("schreibe Gebäudeübersicht für Müllerstraße.xlsx", 0)
	line := strings.Trim(out.String(), "\r")
	if n := utf8.RuneCountInString(line); n != 23 || !utf8.ValidString(line) {
		t.Errorf("%q has %d letters", line, n)
	}
}

func TestCountsOfManyWorkersAddUp(t *testing.T) {
	var out bytes.Buffer
	p := &Progress{w: &out, width: 60}
	const workers, each = 8, 500
	p.Stage("estimating", workers*each)
	var wg sync.WaitGroup
	for range workers {
		wg.Go(func() {
			for range each {
				p.Add(1)
				p.Rows(1)
			}
		})
	}
	wg.Wait()
	if !strings.Contains(out.String(), "4000/4000") {
		t.Errorf("the last line does not show all steps: %q", out.String())
	}
}

func TestWatchSeesStagesAndShowsNothing(t *testing.T) {
	var seen []string
	p := Watch(func(stage string) { seen = append(seen, stage) })
	p.Stage("reading", 2)
	p.Add(2)
	p.Done()
	p.Stage("writing", 0)
	p.Done()
	if want := []string{"reading", "writing"}; !slices.Equal(seen, want) {
		t.Errorf("saw %q, want %q", seen, want)
	}
}

func TestNilDoesNothing(t *testing.T) {
	var p *Progress
	p.Stage("reading", 1)
	p.Add(1)
	p.Rows(1)
	p.Done()
}
