package study

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"io"
	"math"
	"os"
	"slices"

	"cedewright/cmd/internal/settings"
	"cedewright/optimize"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/fault"
	"cedewright/portfolio/loss"
	"cedewright/portfolio/treaty"
)

// Options of a run; none changes a figure but Seed and Scenario.
type Options struct {
	Seed     *uint64 // of the book's models; nil = that of the study
	Workers  int     // at least 1
	Scenario string  // of the market; "" = none
	Progress func(stage string)
}

// Study is one renewal decision, loaded and checked.
type Study struct {
	settings   settings.Study
	options    Options
	head       Head
	book       loss.Book
	fits       []HistoryFit
	curves     []CurveFit
	programmes []treaty.Programme
	standards  []capital.Standard
	appraiser  *optimize.Appraiser
}

// Open loads a study: settings, losses, curves, programmes. It fails with every fault of the stage that it reaches.
func Open(ctx context.Context, path string, o Options) (*Study, error) {
	o.Workers = max(o.Workers, 1)
	if o.Progress == nil {
		o.Progress = func(string) {}
	}
	o.Progress("reading the study")
	set, err := settings.Load(path)
	if err != nil {
		return nil, err
	}
	s := &Study{settings: set, options: o}
	s.head = Head{Title: set.Title, Currency: set.Currency, Years: int(set.Book.Years), Inputs: []Input{{Path: path, SHA256: hash(set.Bytes)}}}
	if set.Notes != "" {
		s.head.Notes = append(s.head.Notes, set.Notes)
	}
	if set.Book.Seed != nil {
		s.head.Seed = uint64(*set.Book.Seed)
	}
	if o.Seed != nil {
		s.head.Seed = *o.Seed
	}
	for _, stage := range []struct {
		name string
		run  func() error
	}{
		{"loading the book", s.loadBook},
		{"checking the programmes", s.loadProgrammes},
		{"fitting the market", s.loadMarket},
		{"measuring the gross position", s.prepare},
	} {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		o.Progress(stage.name)
		if err := stage.run(); err != nil {
			return nil, err
		}
	}
	return s, nil
}

func hash(data []byte) string {
	sum := sha256.Sum256(data)
	return hex.EncodeToString(sum[:])
}

// read opens a file of the study, hands it on and notes what was read.
func (s *Study) read(key, file string, take func(r io.Reader, file string) (rows int, err error)) error {
	path := s.settings.Path(file)
	for _, in := range s.head.Inputs {
		if in.Path == path { // read before, by another curve: its hash is noted
			f, err := os.Open(path)
			if err != nil {
				return err
			}
			defer f.Close()
			_, err = take(f, path)
			return err
		}
	}
	f, err := os.Open(path)
	if err != nil {
		at := s.settings.At(fault.Fault{Key: key, Found: fmt.Sprintf("%q cannot be read", path), Allowed: "the path of a file, from the folder of the study", Err: unwrap(err)})
		return &at
	}
	defer f.Close()
	if info, err := f.Stat(); err == nil && info.IsDir() {
		at := s.settings.At(fault.Fault{Key: key, Found: fmt.Sprintf("%q is a folder", path), Allowed: "the path of a file, from the folder of the study"})
		return &at
	}
	digest := sha256.New()
	rows, err := take(io.TeeReader(f, digest), path)
	if err != nil {
		return err
	}
	if _, err := io.Copy(digest, f); err != nil {
		return err
	}
	s.head.Inputs = append(s.head.Inputs, Input{Path: path, SHA256: hex.EncodeToString(digest.Sum(nil)), Rows: rows})
	return nil
}

func unwrap(err error) error {
	if p, ok := err.(*os.PathError); ok {
		return p.Err
	}
	return err
}

func (s *Study) loadBook() error {
	set := s.settings.Book
	var faults fault.List
	for _, c := range set.Classes {
		s.book.Classes = append(s.book.Classes, loss.Class{Name: c.Name, Premium: float64(c.Premium), Expenses: float64(c.Expenses)})
	}
	names := make([]string, len(set.Classes))
	for i, c := range set.Classes {
		names[i] = c.Name
	}
	b := loss.NewBuilder(int(set.Years), names)
	for i, t := range set.Tables {
		faults.AddError(s.read(fmt.Sprintf("book.tables[%d].file", i), t.File, b.ReadCSV))
	}
	var models []loss.Model
	for i, m := range set.Models {
		model, err := s.model(fmt.Sprintf("book.models[%d]", i), m)
		faults.AddError(err)
		models = append(models, model)
	}
	var attritional *loss.Attritional
	if a := set.Attritional; a != nil {
		attritional = &loss.Attritional{Family: a.Family, Correlation: a.Matrix()}
		for _, l := range a.Losses {
			attritional.Losses = append(attritional.Losses, loss.AttritionalLoss{Class: l.Class, Mean: float64(l.Mean), CV: float64(l.CV)})
		}
	}
	if err := faults.Err(); err != nil {
		return err
	}
	table, err := b.Simulate(s.head.Seed, models, attritional, s.options.Workers)
	if err != nil {
		at := s.settings.At(fault.Fault{Key: "book", Err: err})
		return &at
	}
	s.book.Table = table
	return nil
}

func (s *Study) model(key string, m settings.Model) (loss.Model, error) {
	model := loss.Model{Name: m.Name, Peril: m.Peril, PerRisk: m.PerRisk}
	at := func(sub string, err error) error {
		if err == nil || len(fault.All(err)) > 0 {
			return err
		}
		f := s.settings.At(fault.Fault{Key: key + sub, Err: err})
		return &f
	}
	for _, share := range m.Split {
		model.Split = append(model.Split, loss.Share{Class: share.Class, Fraction: float64(share.Share)})
	}
	var err error
	if m.Severity != nil {
		if model.Severity, err = m.Severity.Law(); err != nil {
			return model, at(".severity", err)
		}
	}
	if m.History == nil {
		model.Frequency, err = m.Frequency.Law()
		return model, at(".frequency", err)
	}
	losses, err := s.readHistory(key, *m.History)
	if err != nil {
		return model, err
	}
	classes := make([]string, len(m.History.Columns))
	for i, c := range m.History.Columns {
		classes[i] = c.Class
	}
	ceiling := math.Inf(1)
	if m.History.Ceiling != nil {
		ceiling = float64(*m.History.Ceiling)
	}
	model.History, err = loss.NewEventHistory(losses, classes, float64(m.History.TailThreshold), ceiling)
	if err != nil {
		return model, at(".history", err)
	}
	if m.Frequency.Family == "fitted" {
		fit, err := loss.FitFrequency(loss.YearlyCounts(losses))
		if err != nil {
			return model, at(".frequency", err)
		}
		model.Frequency = fit.Frequency
	} else if model.Frequency, err = m.Frequency.Law(); err != nil {
		return model, at(".frequency", err)
	}
	s.describeHistory(m, model, losses)
	return model, nil
}

func (s *Study) readHistory(key string, h settings.History) ([]loss.HistoryLoss, error) {
	format := loss.HistoryFormat{Date: h.DateColumn, Total: h.TotalColumn, Scale: 1}
	for _, c := range h.Columns {
		format.Parts = append(format.Parts, c.Column)
	}
	if h.Scale != nil {
		format.Scale = float64(*h.Scale)
	}
	if h.Minimum != nil {
		format.Minimum = float64(*h.Minimum)
	}
	var losses []loss.HistoryLoss
	err := s.read(key+".history.file", h.File, func(r io.Reader, file string) (int, error) {
		var err error
		losses, err = loss.ReadHistory(r, file, format)
		return len(losses), err
	})
	return losses, err
}

// describeHistory notes what was fitted to a history, and how short it is against what is asked of it.
func (s *Study) describeHistory(m settings.Model, model loss.Model, losses []loss.HistoryLoss) {
	fit := model.History.Fit()
	years := len(loss.YearlyCounts(losses))
	if m.History.DateColumn == "" {
		years = 0
	}
	h := HistoryFit{
		Model: m.Name, File: s.settings.Path(m.History.File), Losses: len(losses), Years: years, Threshold: float64(m.History.TailThreshold),
		Exceedances: fit.Count, Xi: fit.Xi, XiError: fit.XiError, Beta: fit.Beta, BetaError: fit.BetaError,
		Frequency: model.Frequency.String(), LargestLoss: model.History.Largest(),
	}
	if years > 0 {
		rate := model.Frequency.Mean() * model.History.Survival(h.LargestLoss)
		h.Extrapolation = fmt.Sprintf("%d years of history stand behind %d simulated ones; the largest loss of the past is exceeded about once in %.0f simulated years, and everything beyond it is extrapolated",
			years, s.head.Years, 1/rate)
		s.head.Warnings = append(s.head.Warnings, "Model "+m.Name+": "+h.Extrapolation+".")
	}
	s.fits = append(s.fits, h)
}

func (s *Study) loadProgrammes() error {
	var faults fault.List
	table := s.book.Table
	for i, p := range s.settings.Programmes {
		programme := s.settings.Terms(p)
		for _, f := range fault.All(programme.Validate(table.Classes(), table.Perils())) {
			f.Key = fmt.Sprintf("programmes[%d].%s", i, f.Key)
			faults.Add(s.settings.At(*f))
		}
		s.programmes = append(s.programmes, programme)
	}
	for i, q := range s.settings.Market.OwnQuotes {
		one := treaty.Programme{Treaties: []treaty.Treaty{q.Terms()}}
		one.Treaties[0].After = nil
		for _, f := range fault.All(one.Validate(table.Classes(), table.Perils())) {
			f.Key = fmt.Sprintf("market.own_quotes[%d].%s", i, f.Key)
			faults.Add(s.settings.At(*f))
		}
	}
	if s.settings.Search != nil {
		space, err := s.settings.Space()
		faults.AddError(err)
		for i, t := range space.Towers {
			for _, name := range t.Template.Perils {
				if !slices.Contains(table.Perils(), name) {
					faults.Add(s.settings.At(fault.Fault{
						Key: fmt.Sprintf("search.towers[%d].perils", i), Found: fmt.Sprintf("no peril of the book is named %q", name),
						Allowed: fmt.Sprintf("%q", table.Perils()), Nearest: fault.Nearest(name, table.Perils()),
					}))
				}
			}
		}
	}
	return faults.Err()
}
