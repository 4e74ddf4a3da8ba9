package report

import (
	"fmt"
	"io"
	"slices"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
	"cedewright/portfolio/treaty"
)

// panelWords names who stands behind a treaty: "Harbour Re 60 % (collateral 5m), Dune Re 40 %"; "" for no panel.
func panelWords(t treaty.Treaty) string {
	text, left := "", 1.0
	for i, line := range t.Panel {
		if i > 0 {
			text += ", "
		}
		text += line.Reinsurer + " " + percentOf(line.Share)
		if line.Collateral > 0 {
			text += " (collateral " + Terms(line.Collateral) + ")"
		}
		left -= line.Share
	}
	if text != "" && left > 1e-9 { // rounding of shares
		text += fmt.Sprintf(", the other %s free of default", percentOf(left))
	}
	return text
}

// recoverable gives the expected recoveries that a reinsurer owes under a programme, money per year. The errors of its treaties are added up, the most that
// the error of a sum can be.
func recoverable(p optimize.Appraisal, reinsurer string) optimize.Estimate {
	var sum optimize.Estimate
	for _, f := range p.Treaties {
		for _, line := range f.Terms.Panel {
			if line.Reinsurer == reinsurer {
				sum.Value += line.Share * f.ExpectedRecovery.Value
				sum.StandardError += line.Share * f.ExpectedRecovery.StandardError
			}
		}
	}
	return sum
}

// reinsurerTables shows the reinsurers of a study, and what each is expected to owe under every programme that has treaties; none without a register.
func reinsurerTables(a study.Appraised, all []optimize.Appraisal) []textTable {
	if a.Security == nil || len(a.Security.Reinsurers) == 0 {
		return nil
	}
	all = slices.DeleteFunc(slices.Clone(all), func(p optimize.Appraisal) bool { return len(p.Treaties) == 0 })
	ratings := textTable{Title: "Who stands behind the treaties", Head: []string{"reinsurer", "default a year", "lost on default", "rated by"}, Remark: true}
	owed := textTable{Title: "Recoveries expected from each reinsurer, a year", Head: []string{"reinsurer"}}
	var amounts []float64
	for _, p := range all {
		owed.Head = append(owed.Head, clean(p.Programme.Name))
		for _, r := range a.Security.Reinsurers {
			amounts = append(amounts, recoverable(p, r.Name).Value)
		}
	}
	u := unitOf(amounts...)
	for _, r := range a.Security.Reinsurers {
		rated := r.RatedBy
		if r.Tied {
			rated += "; assets tied as collateral"
		}
		ratings.Rows = append(ratings.Rows, []string{clean(r.Name), percentOf(r.Default), percentOf(r.LossGiven), clean(rated)})
		row := []string{clean(r.Name)}
		for _, p := range all {
			row = append(row, u.estimate(recoverable(p, r.Name)))
		}
		owed.Rows = append(owed.Rows, row)
	}
	if len(all) == 0 {
		return []textTable{ratings}
	}
	return []textTable{ratings, owed}
}

// securityWords says how failures are drawn.
func securityWords(a study.Appraised) string {
	text := "What is lost on default is a fraction of the year's recovery beyond collateral. " +
		"Where several treaties make up a recovery, its error is the sum of theirs, the most that it can be. "
	if a.Security.Correlation == 0 {
		return text + "Failures fall on good and bad years alike."
	}
	return text + "Failures are more likely in the cedant's bad years: each reinsurer's fortune hangs on the year with a loading of " +
		written(a.Security.Correlation, 4) + "."
}

func printReinsurers(w io.Writer, s Style, a study.Appraised, all []optimize.Appraisal) {
	tables := reinsurerTables(a, all)
	if len(tables) == 0 {
		return
	}
	for _, t := range tables {
		printTable(w, s, t)
	}
	wrapped(w, securityWords(a), "", s.width())
	fmt.Fprintln(w)
}
