package security

// Reinsurer is a counterparty of treaties.
type Reinsurer struct {
	Name      string
	Default   float64 // probability of default within the year, 0–1
	Step      int     // credit quality step, 0–6; −1 when none was given (a probability or a solvency ratio was)
	LossGiven float64 // fraction of an unpaid recovery that is lost on default, 0–1
	Tied      bool    // 60 % or more of its assets are tied as collateral
	RatedBy   string  // where the probability is from, in words: "step 2", "solvency ratio 150 %", "set in the study"
}

// Line is a reinsurer's part of a treaty, as the treaty's panel gives it.
//
// (The type of treaty.Line; a panel lives with its treaty.)

// Register is the reinsurers of a study.
type Register struct {
	Reinsurers  []Reinsurer
	Correlation float64 // of a reinsurer's fortune with the cedant's bad years, 0–1 (below 1): the loading on the year's factor
	Seed        uint64
}
