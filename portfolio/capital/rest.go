package capital

// Rest is what else the company stands for beside the book: its other risks. Either a capital figure with a correlation, or the law of a
// yearly loss that is combined with the book year by year.
type Rest struct {
	// A capital figure: K of the company = √(K² + 2·Correlation·K·Capital + Capital²).
	Capital     float64 // money, ≥ 0
	Correlation float64 // −1 to 1

	// A loss distribution: Quantile gives the loss of the rest at a probability within (0, 1), in money, a profit negative. Its years are paired with the
	// book's gross losses at RankCorrelation (Spearman, by a normal copula).
	Quantile        func(probability float64) float64 // nil = a capital figure
	RankCorrelation float64                           // −1 to 1
	Seed            uint64
}
