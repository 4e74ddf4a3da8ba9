package cli

import (
	"bytes"
	"context"
	"errors"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"cedewright/cmd/internal/report"
	"cedewright/cmd/internal/settings"
	"cedewright/optimize"
	"cedewright/portfolio/fault"
)

// TestEveryFaultHasItsLine: however errors are wrapped, each fault is told on a line of its own, and the exit code says whose fault it was.
func TestEveryFaultHasItsLine(t *testing.T) {
	var faults fault.List
	faults.Add(fault.Fault{File: "a.yaml", Line: 3, Key: "share", Found: `"ten" is not a number`})
	faults.Add(fault.Fault{File: "a.yaml", Line: 9, Key: "limit", Found: "no value"})
	for _, c := range []struct {
		err  error
		code int
		want string
	}{
		{nil, done, ""},
		{faults.Err(), wrong, "cedewright: a.yaml:3: share: \"ten\" is not a number\ncedewright: a.yaml:9: limit: no value\ncedewright: 2 faults\n"},
		{errors.Join(nil, &fault.Fault{Key: "--out", Found: "x"}), wrong, "cedewright: --out: x\n"},
		{usageError{errors.New("no such flag")}, wrong, "cedewright: no such flag\n"},
		{errors.New("disk full"), failed, "cedewright: disk full\n"},
		{errors.Join(errors.New("disk full"), errors.New("pipe closed")), failed, "cedewright: disk full\ncedewright: pipe closed\n"},
	} {
		var b bytes.Buffer
		if code := tell(&b, c.err); code != c.code || b.String() != c.want {
			t.Errorf("%v: exit %d, %q; want %d, %q", c.err, code, b.String(), c.code, c.want)
		}
	}
}

// TestPanicIsTold: a mistake of ours ends with a short message, not with a trace.
func TestPanicIsTold(t *testing.T) {
	var b bytes.Buffer
	code := guarded(&b, func() int {
		var none []int
		return none[len(b.String())]
	})
	text := b.String()
	if code != failed || strings.Count(text, "\n") != 2 || !strings.Contains(text, "internal error in cedewright/cmd/internal/cli.") || strings.Contains(text, "goroutine") {
		t.Errorf("exit %d\n%s", code, text)
	}
}

// TestInterruptedOnTheWay: a search that is ended after its first generation gives the best so far, writes it, and says so.
func TestInterruptedOnTheWay(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	defer cancel()
	out := filepath.Join(t.TempDir(), "run")
	stderr := &trigger{on: "cedewright: search: ", do: cancel}
	var stdout bytes.Buffer
	code := Run(ctx, []string{"search", small, "--out", out, "--generations", "100000", "--patience", "100000"}, &stdout, stderr)
	if code != done || !strings.Contains(stderr.String(), "interrupted: the result is the best so far") || !strings.Contains(stdout.String(), "interrupted; the best so far") {
		t.Errorf("exit %d\n%s\n%s", code, stderr.String(), stdout.String())
	}
	data, err := os.ReadFile(filepath.Join(out, "report.html"))
	if err != nil || !strings.Contains(string(data), "The search was interrupted") {
		t.Errorf("the paper does not say that the search was interrupted (%v)", err)
	}
}

// trigger calls a function when a text is written.
type trigger struct {
	bytes.Buffer
	on string
	do func()
}

func (w *trigger) Write(p []byte) (int, error) {
	if strings.Contains(string(p), w.on) {
		w.do()
	}
	return w.Buffer.Write(p)
}

// TestResultOutlivesTheFolder: when the folder cannot be written after all, the result is still printed and the run has failed.
func TestResultOutlivesTheFolder(t *testing.T) {
	a := answer{
		text:  func(w io.Writer, _ report.Style) { _, _ = io.WriteString(w, "the result") },
		json:  func(w io.Writer) error { _, err := io.WriteString(w, "{}"); return err },
		files: []report.File{{Name: "frontier.csv", Write: func(io.Writer) error { return errors.New("disk full") }}},
	}
	parent := t.TempDir()
	r := settings.Run{Out: filepath.Join(parent, "run")}
	var stdout, stderr bytes.Buffer
	err := errors.Join(writeFolder(a, r, &stderr), printAnswer(a, r, &stdout))
	if err == nil || stdout.String() != "the result" || strings.Contains(stderr.String(), "wrote") {
		t.Errorf("%v, %q, %q", err, stdout.String(), stderr.String())
	}
	if entries, err := os.ReadDir(parent); err != nil || len(entries) != 0 {
		t.Errorf("left behind: %v", entries)
	}
	r.Out, r.JSON = "", true
	stdout.Reset()
	if err := printAnswer(a, r, &stdout); err != nil || stdout.String() != "{}" {
		t.Errorf("%v, %q", err, stdout.String())
	}
}

func TestDescribeProgress(t *testing.T) {
	for want, p := range map[string]optimize.Progress{
		"search: 3 of at most 200, 12,345 programmes appraised, best total cost 29.86m": {Phase: "search", Done: 3, Total: 200, Evaluations: 12345, TotalCost: 29.86e6, Feasible: true},
		"search: 1 of at most 200, 1 programme appraised, nothing feasible yet":         {Phase: "search", Done: 1, Total: 200, Evaluations: 1},
		"polish: round 2, 50 programmes appraised, best total cost 1m":                  {Phase: "polish", Done: 2, Evaluations: 50, TotalCost: 1e6, Feasible: true},
		"errors and reliefs: programme 2 of 9":                                          {Phase: "detail", Done: 2, Total: 9},
	} {
		if got := describe(p); got != want {
			t.Errorf("progress is told as %q, want %q", got, want)
		}
	}
}

func TestStyleOf(t *testing.T) {
	if s := styleOf(&bytes.Buffer{}, false); s.Colour || s.Width != 0 {
		t.Errorf("a buffer is taken for a terminal: %+v", s)
	}
	f, err := os.Create(filepath.Join(t.TempDir(), "x"))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if s := styleOf(f, false); s.Colour || s.Width != 0 {
		t.Errorf("a file is taken for a terminal: %+v", s)
	}
}
