package cli

import (
	"context"
	"errors"
	"fmt"
	"io"

	"cedewright/cmd/internal/report"
	"cedewright/cmd/internal/settings"
	"cedewright/cmd/internal/study"
	"cedewright/optimize"
	"cedewright/portfolio/fault"

	"github.com/spf13/cobra"
)

// answer is what a verb has to say, in every form.
type answer struct {
	text  func(io.Writer) error
	json  func(io.Writer) error
	files func() ([]report.File, error) // beside result.json
	note  string                        // for standard error
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

// plain turns a printer that cannot fail into one that may.
func plain[T any](print func(io.Writer, T), result T) func(io.Writer) error {
	return func(w io.Writer) error { print(w, result); return nil }
}

// document does the same for a JSON document.
func document[T any](write func(io.Writer, T) error, result T) func(io.Writer) error {
	return func(w io.Writer) error { return write(w, result) }
}

func runLook(ctx context.Context, s *study.Study, _ settings.Run, _ *progress) (answer, error) {
	l, err := s.Look(ctx)
	return answer{text: plain(report.PrintLook, l), json: document(report.LookJSON, l)}, err
}

func runFit(ctx context.Context, s *study.Study, _ settings.Run, _ *progress) (answer, error) {
	f, err := s.Fit(ctx)
	return answer{
		text: plain(report.PrintFitted, f), json: document(report.FittedJSON, f),
		files: func() ([]report.File, error) { return report.CurvePictures(f.Curves) },
	}, err
}

func runAppraise(ctx context.Context, s *study.Study, _ settings.Run, _ *progress) (answer, error) {
	a, err := s.Appraise(ctx)
	return answer{text: plain(report.PrintAppraised, a), json: document(report.AppraisedJSON, a)}, err
}

func runSearch(ctx context.Context, s *study.Study, r settings.Run, p *progress) (answer, error) {
	found, err := s.Search(ctx, study.SearchOptions{
		Seed: r.Seed, Evaluations: r.Evaluations, Generations: r.Generations, Population: r.Population, Patience: r.Patience, Progress: p.search,
	})
	if err != nil {
		return answer{}, err
	}
	a := answer{
		text: plain(report.PrintSearched, found), json: document(report.SearchedJSON, found),
		files: func() ([]report.File, error) { return report.SearchFiles(found) },
	}
	if found.Result.Status == optimize.Interrupted {
		a.note = "interrupted: the result is the best so far"
	}
	return a, nil
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
	s, err := study.Open(ctx, path, study.Options{Workers: r.Workers, Progress: p.stage})
	if err != nil {
		return err
	}
	a, err := v.run(ctx, s, r, p)
	if err != nil {
		return err
	}
	p.close()
	if r.Out != "" {
		if err := writeFolder(a, r); err != nil {
			return err
		}
		fmt.Fprintf(stderr, "cedewright: wrote %s\n", r.Out)
	}
	if a.note != "" {
		fmt.Fprintf(stderr, "cedewright: %s\n", a.note)
	}
	if r.JSON {
		return print(stdout, a.json)
	}
	return print(stdout, a.text)
}

// usageOr marks an error without faults as one of usage.
func usageOr(err error) error {
	if len(fault.All(err)) > 0 {
		return err
	}
	return usageError{err}
}

// writeFolder writes result.json and what else the verb makes.
func writeFolder(a answer, r settings.Run) error {
	files := []report.File{{Name: "result.json", Write: a.json}}
	if a.files != nil {
		more, err := a.files()
		if err != nil {
			return err
		}
		files = append(files, more...)
	}
	if err := report.WriteFolder(r.Out, r.Replace, files); err != nil {
		return errors.Join(err)
	}
	return nil
}
