// Package progress shows how far long work has come: one line that is rewritten
// on a terminal, nothing at all in a pipe.
package progress

import (
	"fmt"
	"io"
	"os"
	"strings"
	"sync"
	"time"

	"golang.org/x/term"
)

// interval between two drawings: fast enough to see life, slow enough to cost
// nothing.
const interval = 100 * time.Millisecond

// Progress is safe for concurrent use. A nil or silent one does nothing.
type Progress struct {
	mu    sync.Mutex
	w     io.Writer
	width int
	stage string
	total int
	done  int
	rows  int
	drawn time.Time
	dirty bool // a line stands on the terminal
	seen  func(stage string)
}

// New shows progress on w if it is a terminal and quiet is not set.
func New(w io.Writer, quiet bool) *Progress {
	f, ok := w.(*os.File)
	if quiet || !ok || !term.IsTerminal(int(f.Fd())) {
		return nil
	}
	width, _, err := term.GetSize(int(f.Fd()))
	if err != nil || width < 20 {
		width = 80
	}
	return &Progress{w: w, width: width}
}

// Watch shows nothing and calls seen as each stage begins: for measuring stages.
func Watch(seen func(stage string)) *Progress { return &Progress{seen: seen} }

// Stage begins a stage of total steps; 0 when their number is not known.
func (p *Progress) Stage(name string, total int) {
	if p == nil {
		return
	}
	p.mu.Lock()
	defer p.mu.Unlock()
	if p.seen != nil {
		p.seen(name)
	}
	p.stage, p.total, p.done, p.rows = name, total, 0, 0
	p.draw(true)
}

// Add counts steps done.
func (p *Progress) Add(n int) {
	if p == nil {
		return
	}
	p.mu.Lock()
	defer p.mu.Unlock()
	p.done += n
	p.draw(p.done >= p.total)
}

// Rows counts rows read within a step.
func (p *Progress) Rows(n int) {
	if p == nil {
		return
	}
	p.mu.Lock()
	defer p.mu.Unlock()
	p.rows += n
	p.draw(false)
}

// Done clears the line.
func (p *Progress) Done() {
	if p == nil {
		return
	}
	p.mu.Lock()
	defer p.mu.Unlock()
	if p.dirty {
		fmt.Fprintf(p.w, "\r%s\r", strings.Repeat(" ", p.width-1))
		p.dirty = false
	}
}

func (p *Progress) draw(now bool) {
	if p.w == nil || !now && time.Since(p.drawn) < interval {
		return
	}
	p.drawn = time.Now()
	line := p.stage
	if p.total > 0 {
		const bar = 24
		n := min(bar, bar*p.done/p.total)
		line += fmt.Sprintf(" [%s%s] %d/%d", strings.Repeat("#", n), strings.Repeat(".", bar-n), p.done, p.total)
	}
	if p.rows > 0 {
		line += fmt.Sprintf(", %d rows", p.rows)
	}
	// A line that wraps could not be taken back.
	if r := []rune(line); len(r) > p.width-1 {
		line = string(r[:p.width-1])
	}
	fmt.Fprintf(p.w, "\r%-*s", p.width-1, line)
	p.dirty = true
}
