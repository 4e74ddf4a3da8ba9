package cli

import (
	"fmt"
	"io"
	"os"
	"sync"
	"sync/atomic"
	"time"

	"cedewright/cmd/internal/report"
	"cedewright/optimize"

	"github.com/vbauerster/mpb/v8"
	"github.com/vbauerster/mpb/v8/decor"
	"golang.org/x/term"
)

// Progress goes to standard error: a bar with the time left on a terminal, elsewhere a plain line at each new stage and every few seconds.
// It tells nothing when quiet.
type progress struct {
	out      io.Writer
	quiet    bool
	terminal bool

	mu     sync.Mutex
	bars   *mpb.Progress
	bar    *mpb.Bar
	phase  string
	last   atomic.Pointer[optimize.Progress] // read by the bar's own goroutine, which must not wait for mu
	said   time.Time
	closed bool
}

// sayEvery is how often a plain line is printed at most.
const sayEvery = 5 * time.Second

func newProgress(out io.Writer, quiet bool) *progress {
	p := &progress{out: out, quiet: quiet}
	if f, ok := out.(*os.File); ok {
		p.terminal = term.IsTerminal(int(f.Fd()))
	}
	return p
}

// stage says what is done next.
func (p *progress) stage(name string) {
	if !p.quiet {
		fmt.Fprintf(p.out, "cedewright: %s\n", name)
	}
}

// search shows how far a search is.
func (p *progress) search(s optimize.Progress) {
	if p.quiet {
		return
	}
	p.mu.Lock()
	defer p.mu.Unlock()
	p.last.Store(&s)
	if p.terminal {
		p.show(s)
		return
	}
	if s.Phase != p.phase || time.Since(p.said) > sayEvery {
		p.phase, p.said = s.Phase, time.Now()
		fmt.Fprintf(p.out, "cedewright: %s\n", describe(s))
	}
}

func describe(s optimize.Progress) string {
	best := "nothing feasible yet"
	if s.Feasible {
		best = "best total cost " + report.Money(s.TotalCost)
	}
	switch {
	case s.Phase == "detail":
		return fmt.Sprintf("errors and reliefs: programme %d of %d", s.Done, s.Total)
	case s.Total == 0:
		return fmt.Sprintf("%s: round %d, %s appraised, %s", s.Phase, s.Done, report.Count(s.Evaluations, "programme", "programmes"), best)
	}
	return fmt.Sprintf("%s: %d of at most %d, %s appraised, %s", s.Phase, s.Done, s.Total, report.Count(s.Evaluations, "programme", "programmes"), best)
}

// inShort leaves out what the bar shows.
func inShort(s optimize.Progress) string {
	switch {
	case s.Phase == "detail":
		return "errors and reliefs"
	case !s.Feasible:
		return fmt.Sprintf("%s, %s, nothing feasible yet", s.Phase, report.Count(s.Evaluations, "programme", "programmes"))
	}
	return fmt.Sprintf("%s, %s, best %s", s.Phase, report.Count(s.Evaluations, "programme", "programmes"), report.Money(s.TotalCost))
}

// show moves the bar of a phase.
func (p *progress) show(s optimize.Progress) {
	if p.bars == nil {
		p.bars = mpb.New(mpb.WithOutput(p.out), mpb.WithWidth(40))
	}
	if s.Phase != p.phase {
		p.finishBar()
		p.phase = s.Phase
		decorators := []decor.Decorator{decor.Any(func(decor.Statistics) string {
			return " " + inShort(*p.last.Load())
		})}
		if s.Total > 0 {
			decorators = append(decorators, decor.OnComplete(decor.AverageETA(decor.ET_STYLE_MMSS, decor.WC{W: 7}), ""), decor.Name(" left at most"))
		}
		p.bar = p.bars.AddBar(int64(s.Total), mpb.BarRemoveOnComplete(), mpb.AppendDecorators(decorators...))
	}
	if s.Total > 0 {
		p.bar.SetCurrent(int64(min(s.Done, s.Total-1)))
	}
}

// finishBar takes the bar away.
func (p *progress) finishBar() {
	if p.bar != nil {
		p.bar.Abort(true)
		p.bar = nil
	}
}

// close takes away what is still shown; it may be called twice.
func (p *progress) close() {
	p.mu.Lock()
	if p.closed {
		p.mu.Unlock()
		return
	}
	p.closed = true
	p.finishBar()
	bars := p.bars
	p.mu.Unlock()
	if bars != nil {
		bars.Wait()
	}
}
