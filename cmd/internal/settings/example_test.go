package settings_test

import (
	"fmt"

	"cedewright/cmd/internal/settings"
)

// A study with three slips is told all of them at once, each with its place.
func ExampleParse() {
	const text = `study: Three slips
currency: EUR
book:
  years: 1000
  classes: [{name: household, premium: 12 million}]
  models:
    - name: windstorm
      peril: windstorm
      frequency: {family: poisson, mean: 1.4}
      severity: {family: pareto, threshold: 4m, alhpa: 1.25, ceiling: 1.5bn}
      split: [{class: houshold, share: 100%}]
capital: {cost: 9%, standards: [{name: one-year, preset: eu-one-year}]}
`
	_, err := settings.Parse([]byte(text), "study.yaml")
	fmt.Println(err)
	// Output:
	// study.yaml:5:40: book.classes[0].premium: "12 million"; allowed: money, such as 25m, 1.5bn, 750k or a plain number
	// study.yaml:10:49: book.models[0].severity.alhpa: unknown key; allowed: keys family, mu, sigma, mean, cv, threshold, alpha, xi, beta, shape, scale, ceiling; did you mean "alpha"?
	// study.yaml:11:23: book.models[0].split[0].class: no class is named "houshold"; allowed: ["household"]; did you mean "household"?
}
