package capital

import "cedewright/portfolio/sample"

// Presets lists the standards that a study can name, each with its legal source and how that was known. A preset gives the measure of
// one year's result; what else a regime asks for (other risks, formulas, transitional rules) it does not know. Law changes: the
// responsible actuary checks the text in force.
//
// All count from the result of the year. The requirement is a worst change of own funds over the year, for value at risk (basic own funds)
// as for expected shortfall (risk-bearing capital), and the margin expected in the year's premiums is part of that change: a treaty that
// gives margin away makes the worst change worse by as much, which the deviation from the mean would hide. Regimes, or supervisors, that
// do not let expected profit count are met by basis deviation, set in the study beside the preset. (Common practice, no source.)
func Presets() []Standard {
	return []Standard{
		Single("eu-one-year", ValueAtRisk, level("99.5%"), Result,
			"Directive 2009/138/EC, Art. 101(3): value at risk of basic own funds, 99.5 %, one year (read in the consolidated text)"),
		Single("swiss-one-year", TailValueAtRisk, level("99%"), Result,
			"Swiss Supervision Ordinance (AVO), Art. 41: expected shortfall of the one-year change in risk-bearing capital "+
				"(read in the text of 1 July 2015; the level of 99 % is from memory)"),
		Single("bermuda-one-year", TailValueAtRisk, level("99%"), Result,
			"Bermuda solvency capital requirement: aimed at tail value at risk, 99 %, one year (from memory, no text was read)"),
	}
}

// Preset gives the preset of that name.
func Preset(name string) (Standard, bool) {
	for _, s := range Presets() {
		if s.Name == name {
			return s, true
		}
	}
	return Standard{}, false
}

func level(text string) sample.Level {
	l, err := sample.ParseLevel(text)
	if err != nil {
		panic("capital: level of a preset: " + err.Error())
	}
	return l
}
