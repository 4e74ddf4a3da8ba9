package cli

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"os"

	"cedewright/cmd/internal/report"
	"cedewright/cmd/internal/settings"
	"cedewright/cmd/internal/study"
	"cedewright/optimize"
	"cedewright/portfolio/fault"

	"github.com/spf13/cobra"
	"golang.org/x/term"
)

// answer is what a verb has to say, in every form.
type answer struct {
	text  func(io.Writer, report.Style)
	json  func(io.Writer) error
	files []report.File // beside result.json
	note  string        // for standard error
}

// verb is a command on one study.
type verb struct {
	name, short string
	run         func(ctx context.Context, s *study.Study, r settings.Run, p *progress) (answer, error)
}

var verbs = []verb{
	{"look", "Check the data and show the position before reinsurance", runLook},
	{"fit", "Fit the market curves to their quotes", runFit},
	{"appraise", "Show programmes side by side: cost, capital, result", runAppraise},
	{"search", "Find the best programme and the frontier of margin against relief", runSearch},
}

func runLook(ctx context.Context, s *study.Study, _ settings.Run, _ *progress) (answer, error) {
	l, err := s.Look(ctx)
	return answer{
		text: func(w io.Writer, style report.Style) { report.PrintLook(w, l, style) },
		json: func(w io.Writer) error { return report.LookJSON(w, l) },
	}, err
}

func runFit(ctx context.Context, s *study.Study, _ settings.Run, _ *progress) (answer, error) {
	f, err := s.Fit(ctx)
	return answer{
		text:  func(w io.Writer, style report.Style) { report.PrintFitted(w, f, style) },
		json:  func(w io.Writer) error { return report.FittedJSON(w, f) },
		files: report.CurvePictures(f.Curves),
	}, err
}

func runAppraise(ctx context.Context, s *study.Study, _ settings.Run, _ *progress) (answer, error) {
	a, err := s.Appraise(ctx)
	return answer{
		text: func(w io.Writer, style report.Style) { report.PrintAppraised(w, a, style) },
		json: func(w io.Writer) error { return report.AppraisedJSON(w, a) },
	}, err
}

func runSearch(ctx context.Context, s *study.Study, r settings.Run, p *progress) (answer, error) {
	found, err := s.Search(ctx, study.SearchOptions{
		Seed: r.Seed, Evaluations: r.Evaluations, Generations: r.Generations, Population: r.Population, Patience: r.Patience, Progress: p.search,
	})
	if err != nil {
		return answer{}, err
	}
	effective := effectiveSettings(r, found.Result.Seed)
	a := answer{
		text:  func(w io.Writer, style report.Style) { report.PrintSearched(w, found, style) },
		json:  func(w io.Writer) error { return report.SearchedJSON(w, found, effective) },
		files: report.SearchFiles(found, effective),
	}
	if found.Result.Status == optimize.Interrupted {
		a.note = "interrupted: the result is the best so far"
	}
	return a, nil
}

// effectiveSettings lists what bears on the result of a search and where it came from. Workers, folders and the like do not.
func effectiveSettings(r settings.Run, seed uint64) []report.Setting {
	list := []report.Setting{{Name: "seed", Value: fmt.Sprint(seed), Origin: r.Origins["seed"]}}
	for _, s := range []struct {
		name  string
		value int
	}{{"population", r.Population}, {"generations", r.Generations}, {"evaluations", r.Evaluations}, {"patience", r.Patience}} {
		list = append(list, report.Setting{Name: s.name, Value: fmt.Sprint(s.value), Origin: r.Origins[s.name]})
	}
	return list
}

// runVerb loads the study, runs the verb and hands out its answer.
func runVerb(ctx context.Context, v verb, c *cobra.Command, path string, stdout, stderr io.Writer) error {
	loaded, err := settings.Load(path)
	if err != nil {
		return err
	}
	r, err := settings.ReadRun(c.Flags(), loaded)
	if err != nil {
		return usageOr(err)
	}
	if r.Out != "" {
		if err := report.CheckFolder(r.Out, r.Replace); err != nil {
			return err
		}
	}
	quiet, err := c.Flags().GetBool("quiet")
	if err != nil {
		return err
	}
	p := newProgress(stderr, quiet)
	defer p.close()
	s, err := study.Open(ctx, path, study.Options{Workers: r.Workers, Scenario: r.Scenario, Progress: p.stage})
	if err != nil {
		return err
	}
	a, err := v.run(ctx, s, r, p)
	if err != nil {
		return err
	}
	p.close()
	if a.note != "" {
		fmt.Fprintf(stderr, "cedewright: %s\n", a.note)
	}
	// A folder that cannot be written must not lose the result: it is still printed.
	return errors.Join(writeFolder(a, r, stderr), printAnswer(a, r, stdout))
}

// usageOr marks an error without faults as one of usage.
func usageOr(err error) error {
	if len(fault.All(err)) > 0 {
		return err
	}
	return usageError{err}
}

// writeFolder writes result.json and what else the verb makes.
func writeFolder(a answer, r settings.Run, stderr io.Writer) error {
	if r.Out == "" {
		return nil
	}
	files := append([]report.File{{Name: "result.json", Write: a.json}}, a.files...)
	if err := report.WriteFolder(r.Out, r.Replace, files); err != nil {
		return err
	}
	fmt.Fprintf(stderr, "cedewright: wrote %s\n", r.Out)
	return nil
}

// printAnswer writes a result whole: it is built in memory first.
func printAnswer(a answer, r settings.Run, stdout io.Writer) error {
	var b bytes.Buffer
	if r.JSON {
		if err := a.json(&b); err != nil {
			return err
		}
	} else {
		a.text(&b, styleOf(stdout, r.NoColor))
	}
	_, err := stdout.Write(b.Bytes())
	return err
}

// styleOf fits text to a terminal; elsewhere it is plain and of the usual width.
func styleOf(stdout io.Writer, noColour bool) report.Style {
	f, ok := stdout.(*os.File)
	if !ok || !term.IsTerminal(int(f.Fd())) {
		return report.Style{}
	}
	style := report.Style{Colour: !noColour && os.Getenv("TERM") != "dumb"}
	if width, _, err := term.GetSize(int(f.Fd())); err == nil {
		style.Width = width
	}
	return style
}
