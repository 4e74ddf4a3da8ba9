package settings

// Study is a study file as typed values. A nil pointer or an empty text is a key that the file leaves out.
type Study struct {
	Title      string      `key:"study,required"`
	Currency   string      `key:"currency,required"`
	Notes      string      `key:"notes"`
	Book       Book        `key:"book,required"`
	Market     Market      `key:"market"`
	Programmes []Programme `key:"programmes"`
	Capital    Capital     `key:"capital,required"`
	Security   *Security   `key:"security"`
	Search     *Search     `key:"search"`

	File   string           `key:"-"` // as given
	Folder string           `key:"-"` // against which the paths inside resolve
	Bytes  []byte           `key:"-"` // as read
	places map[string]place // of every key
}

// Book is the section of losses.
type Book struct {
	Years       Count        `key:"years,required"`
	Seed        *Seed        `key:"seed"`
	Classes     []Class      `key:"classes,required"`
	Tables      []Table      `key:"tables"`
	Models      []Model      `key:"models"`
	Attritional *Attritional `key:"attritional"`
}

// Class is a line of business.
type Class struct {
	Name     string   `key:"name,required"`
	Premium  Money    `key:"premium,required"`
	Expenses Fraction `key:"expenses"`
}

// Table names a file of simulated losses.
type Table struct {
	File string `key:"file,required"`
}

// Model is a frequency–severity model.
type Model struct {
	Name      string    `key:"name,required"`
	Peril     string    `key:"peril,required"`
	Frequency Frequency `key:"frequency,required"`
	Severity  *Severity `key:"severity"`
	Split     []Share   `key:"split"`
	History   *History  `key:"history"`
	PerRisk   bool      `key:"per_risk"`
}

// Frequency is the law of the number of events a year.
type Frequency struct {
	Family         string    `key:"family,required"`
	Mean           *Number   `key:"mean"`
	VarianceToMean *Number   `key:"variance_to_mean"`
	Trials         *Count    `key:"trials"`
	Probability    *Fraction `key:"probability"`
}

// Severity is the law of the loss of an event.
type Severity struct {
	Family    string  `key:"family,required"`
	Mu        *Number `key:"mu"`
	Sigma     *Number `key:"sigma"`
	Mean      *Money  `key:"mean"`
	CV        *Number `key:"cv"`
	Threshold *Money  `key:"threshold"`
	Alpha     *Number `key:"alpha"`
	Xi        *Number `key:"xi"`
	Beta      *Money  `key:"beta"`
	Shape     *Number `key:"shape"`
	Scale     *Money  `key:"scale"`
	Ceiling   *Money  `key:"ceiling"`
}

// Share is the part of an event's loss that falls on a class.
type Share struct {
	Class string   `key:"class,required"`
	Share Fraction `key:"share,required"`
}

// History is a file of historical losses that gives both severity and split.
type History struct {
	File          string          `key:"file,required"`
	DateColumn    string          `key:"date_column"`
	Columns       []HistoryColumn `key:"columns,required"`
	TotalColumn   string          `key:"total_column"`
	TailThreshold Money           `key:"tail_threshold,required"`
	Minimum       *Money          `key:"minimum"`
	Ceiling       *Money          `key:"ceiling"`
	Scale         *Money          `key:"scale"`
}

// HistoryColumn says which class a column of a history belongs to.
type HistoryColumn struct {
	Column string `key:"column,required"`
	Class  string `key:"class,required"`
}

// Attritional is the annual sums of small losses.
type Attritional struct {
	Family       string            `key:"family,required"`
	Losses       []AttritionalLoss `key:"losses,required"`
	Correlation  *Fraction         `key:"correlation"`
	Correlations []Correlation     `key:"correlations"`
}

// AttritionalLoss is the annual sum of one class.
type AttritionalLoss struct {
	Class string   `key:"class,required"`
	Mean  Money    `key:"mean,required"`
	CV    Fraction `key:"cv,required"`
}

// Correlation is that of two classes.
type Correlation struct {
	Between     []string `key:"between,required"`
	Correlation Fraction `key:"correlation,required"`
}

// Market is the section of prices.
type Market struct {
	Curves    []Curve    `key:"curves"`
	AsOf      *Date      `key:"as_of"`
	OwnQuotes []OwnQuote `key:"own_quotes"`
	Scenarios []Scenario `key:"scenarios"`
}

// Curve is a market curve: fitted to quotes, or a family with its parameter.
type Curve struct {
	Name              string    `key:"name,required"`
	Quotes            string    `key:"quotes"`
	Fit               string    `key:"fit"`
	Family            string    `key:"family"`
	Parameter         *Number   `key:"parameter"`
	Brokerage         Fraction  `key:"brokerage"`
	MinimumRateOnLine *Fraction `key:"minimum_rate_on_line"`
	HalfLife          *Number   `key:"half_life"`
	Error             string    `key:"error"`
	Like              string    `key:"like"`
	Loading           *Fraction `key:"loading"`
}

// OwnQuote is a quote for a layer of the cedant's own, by its rate on line, or for a quota share, by its commission.
type OwnQuote struct {
	Treaty
	RateOnLine *Fraction `key:"rate_on_line"`
	Bid        *Fraction `key:"bid"`
	Offer      *Fraction `key:"offer"`
	Weight     *Number   `key:"weight"`
	Date       *Date     `key:"date"`
	RateChange *Fraction `key:"rate_change"`
	Brokerage  string    `key:"brokerage"`
	Line       string    `key:"line"`
}

// Scenario is a turn of the market.
type Scenario struct {
	Name              string    `key:"name,required"`
	Curves            []string  `key:"curves"`
	RateChange        *Fraction `key:"rate_change"`
	From              *Fraction `key:"from"`
	To                *Fraction `key:"to"`
	MinimumRateOnLine *Fraction `key:"minimum_rate_on_line"`
	CapacityTo        *Level    `key:"capacity_to"`
}

// Programme is a list of treaties.
type Programme struct {
	Name     string   `key:"name,required"`
	Treaties []Treaty `key:"treaties"`
}

// Treaty is the terms of a contract.
type Treaty struct {
	Name             string     `key:"name,required"`
	Kind             string     `key:"kind,required"`
	Classes          []string   `key:"classes"`
	Perils           []string   `key:"perils"`
	After            []string   `key:"after"`
	Cession          *Fraction  `key:"cession"`
	Commission       *Fraction  `key:"commission"`
	Retention        *Money     `key:"retention"`
	Limit            *Limit     `key:"limit"`
	Share            *Fraction  `key:"share"`
	AnnualDeductible *Money     `key:"annual_deductible"`
	AnnualLimit      *Money     `key:"annual_limit"`
	Reinstatements   []Fraction `key:"reinstatements"`
	EventLimit       *Money     `key:"event_limit"`
	Premium          *Money     `key:"premium"`
	Curve            string     `key:"curve"`
	Panel            []Line     `key:"panel"`
}

// Search is the section of what may be chosen.
type Search struct {
	Seed        *Seed   `key:"seed"`
	From        string  `key:"from"`
	Vary        []Vary  `key:"vary"`
	Tower       *Tower  `key:"tower"`
	Towers      []Tower `key:"towers"`
	Keep        []Keep  `key:"keep"`
	Population  *Count  `key:"population"`
	Generations *Count  `key:"generations"`
	Evaluations *Count  `key:"evaluations"`
	Patience    *Count  `key:"patience"`
}

// MoneyRange is from, to and step in money.
type MoneyRange struct {
	From Money  `key:"from,required"`
	To   Money  `key:"to,required"`
	Step *Money `key:"step"`
}

// FractionRange is from, to and step as fractions.
type FractionRange struct {
	From Fraction  `key:"from,required"`
	To   Fraction  `key:"to,required"`
	Step *Fraction `key:"step"`
}

// CountRange is a number of reinstatements, all at one charge.
type CountRange struct {
	From   Count    `key:"from,required"`
	To     Count    `key:"to,required"`
	Charge Fraction `key:"charge,required"`
}

// Vary names a treaty and the terms that may change.
type Vary struct {
	Treaty           string         `key:"treaty,required"`
	Retention        *MoneyRange    `key:"retention"`
	Limit            *MoneyRange    `key:"limit"`
	Share            *FractionRange `key:"share"`
	Cession          *FractionRange `key:"cession"`
	AnnualDeductible *MoneyRange    `key:"annual_deductible"`
	Reinstatements   *CountRange    `key:"reinstatements"`
	Optional         bool           `key:"optional"`
}

// Tower is a tower that the search cuts itself.
type Tower struct {
	Name             string         `key:"name,required"`
	Kind             string         `key:"kind"`
	Classes          []string       `key:"classes"`
	Perils           []string       `key:"perils"`
	After            []string       `key:"after"`
	Replaces         []string       `key:"replaces"`
	Layers           Count          `key:"layers,required"`
	Retention        MoneyRange     `key:"retention,required"`
	Top              MoneyRange     `key:"top,required"`
	Step             Money          `key:"step,required"`
	Share            *FractionRange `key:"share"`
	AnnualDeductible *Money         `key:"annual_deductible"`
	EventLimit       *Money         `key:"event_limit"`
	Reinstatements   *CountRange    `key:"reinstatements"`
	Curve            string         `key:"curve,required"`
	Panel            []Line         `key:"panel"`
}

// Keep is a constraint on a measure of the appraisal.
type Keep struct {
	Measure  string  `key:"measure,required"`
	Standard string  `key:"standard"`
	AtMost   *Amount `key:"at_most"`
	AtLeast  *Amount `key:"at_least"`
}

// Limit is money, or the word unlimited.
type Limit struct {
	Money     Money
	Unlimited bool
}

func (l *Limit) parse(text string) error {
	if text == "unlimited" {
		*l = Limit{Unlimited: true}
		return nil
	}
	return l.Money.parse(text)
}
