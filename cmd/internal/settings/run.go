package settings

import (
	"fmt"
	"os"
	"runtime"
	"slices"
	"strconv"
	"strings"

	"cedewright/optimize"
	"cedewright/portfolio/fault"

	"github.com/spf13/pflag"
	"github.com/spf13/viper"
)

// Run is the settings of one run of the command, as opposed to those of the study. Each is looked for in four places, the first of which
// wins: a flag, an environment variable (CEDEWRIGHT_ and the flag's name in capitals, such as CEDEWRIGHT_NO_COLOR; an empty one counts as
// not set), the study's search section, and the default.
type Run struct {
	Workers     int     // goroutines, 1 to 4,096; default: the processors of the machine; never changes a result
	Seed        *uint64 // of the search; nil = given nowhere
	Out         string  // folder to write to; "" = none
	Scenario    string  // of the market, by its name in the study; "" = none
	Replace     bool    // overwrite what stands in Out
	JSON        bool    // print one JSON document
	NoColor     bool    // no colour on the terminal; NO_COLOR, if not empty, says the same
	Population  int     // plans in a generation, 4 to 10,000
	Generations int     // at most, 1 to 1,000,000
	Evaluations int     // distinct programmes at most, 1 to 100,000,000
	Patience    int     // generations without progress before the search stops, 1 to 1,000,000
	// Origins says, by name of setting, where each value came from: "--seed", "CEDEWRIGHT_SEED", "search.seed" or "default".
	Origins map[string]string
}

// environmentPrefix starts the names of environment variables that this program reads.
const environmentPrefix = "CEDEWRIGHT_"

// setting describes one setting of a run.
type setting struct {
	name        string // of the flag
	usage       string
	kind        string // "count", "seed", "switch" or "text"
	least, most int    // of a count
	preset      string // default, as text; "" = none
	search      bool   // only a search uses it
}

// runSettings lists the settings of a run. The bounds are those of optimize.Search.
func runSettings() []setting {
	return []setting{
		{name: "workers", usage: "goroutines (default: the processors of the machine)", kind: "count", least: 1, most: 4096, preset: strconv.Itoa(min(runtime.GOMAXPROCS(0), 4096))},
		{name: "seed", usage: "seed of the search", kind: "seed"},
		{name: "out", usage: "write the results to this folder", kind: "text"},
		{name: "scenario", usage: "a market scenario of the study, by its name", kind: "text"},
		{name: "replace", usage: "overwrite files in the folder of --out", kind: "switch", preset: "false"},
		{name: "json", usage: "print one JSON document", kind: "switch", preset: "false"},
		{name: "no-color", usage: "no colour on the terminal", kind: "switch", preset: "false"},
		{name: "population", usage: "plans in a generation", kind: "count", least: 4, most: 10_000, preset: strconv.Itoa(optimize.DefaultPopulation), search: true},
		{name: "generations", usage: "generations at most", kind: "count", least: 1, most: 1_000_000, preset: strconv.Itoa(optimize.DefaultGenerations), search: true},
		{name: "evaluations", usage: "distinct programmes at most", kind: "count", least: 1, most: 100_000_000, preset: strconv.Itoa(optimize.DefaultEvaluations), search: true},
		{name: "patience", usage: "generations without progress before the search stops", kind: "count", least: 1, most: 1_000_000, preset: strconv.Itoa(optimize.DefaultPatience), search: true},
	}
}

// AddFlags adds the flags that every verb has: --workers, --seed, --out, --scenario, --replace, --json, --no-color.
func AddFlags(flags *pflag.FlagSet) { addFlags(flags, false) }

// AddSearchFlags adds the flags of a search's budget: --population, --generations, --evaluations, --patience.
func AddSearchFlags(flags *pflag.FlagSet) { addFlags(flags, true) }

func addFlags(flags *pflag.FlagSet, search bool) {
	what := map[string]string{"count": "count", "seed": "seed", "text": "name"}
	for _, s := range runSettings() {
		switch {
		case s.search != search:
		case s.kind == "switch":
			flags.Bool(s.name, false, s.usage)
		case search:
			flags.Var(&word{what: what[s.kind]}, s.name, s.usage+" (default "+s.preset+")")
		default:
			flags.Var(&word{what: what[s.kind]}, s.name, s.usage)
		}
	}
}

// word is a flag whose text ReadRun reads, so that a bad value is reported in the same words wherever it comes from; the help shows what
// it takes.
type word struct{ text, what string }

// String gives the text as it was set.
func (w *word) String() string { return w.text }

// Set takes any text.
func (w *word) Set(text string) error {
	w.text = text
	return nil
}

// Type gives the word that the help shows behind the flag.
func (w *word) Type() string { return w.what }

// ReadRun gathers the settings of a run. Flags that the set does not have are passed over; s may be the zero Study. It fails with every
// fault at once: values out of range, and environment variables that start with CEDEWRIGHT_ but name no setting.
func ReadRun(flags *pflag.FlagSet, s Study) (Run, error) {
	// The delimiter of keys cannot occur in a name. viper never sees the study itself: it lower-cases keys and ignores unknown ones.
	v := viper.NewWithOptions(viper.KeyDelimiter("\x1f"))
	inStudy := s.runValues()
	if err := v.MergeConfigMap(inStudy); err != nil {
		return Run{}, fmt.Errorf("settings: run: %w", err)
	}
	r := &runReader{v: v, flags: flags, study: s, inStudy: inStudy, run: Run{Origins: map[string]string{}}}
	r.unknownVariables()
	for _, one := range runSettings() {
		if err := v.BindEnv(one.name, variable(one.name)); err != nil {
			return Run{}, fmt.Errorf("settings: run: %w", err)
		}
		if f := flags.Lookup(one.name); f != nil {
			if err := v.BindPFlag(one.name, f); err != nil {
				return Run{}, fmt.Errorf("settings: run: %w", err)
			}
		}
		if one.preset != "" {
			v.SetDefault(one.name, one.preset)
		}
		r.take(one)
	}
	if os.Getenv("NO_COLOR") != "" && !flags.Changed("no-color") {
		r.run.NoColor, r.run.Origins["no-color"] = true, "NO_COLOR"
	}
	if r.run.Replace && r.run.Out == "" && flags.Changed("replace") {
		r.faults.Add(fault.Fault{Key: "--replace", Found: "given without --out", Allowed: "--out with a folder, whose files it may overwrite"})
	}
	return r.run, r.faults.Err()
}

// variable gives the environment variable of a setting.
func variable(name string) string {
	return environmentPrefix + strings.ToUpper(strings.ReplaceAll(name, "-", "_"))
}

// runValues gives what the study's search section says of a run, as text.
func (s Study) runValues() map[string]any {
	values := map[string]any{}
	if s.Search == nil {
		return values
	}
	if s.Search.Seed != nil {
		values["seed"] = strconv.FormatUint(uint64(*s.Search.Seed), 10)
	}
	for name, count := range map[string]*Count{
		"population": s.Search.Population, "generations": s.Search.Generations, "evaluations": s.Search.Evaluations, "patience": s.Search.Patience,
	} {
		if count != nil {
			values[name] = strconv.Itoa(int(*count))
		}
	}
	return values
}

// runReader takes the settings one by one.
type runReader struct {
	v       *viper.Viper
	flags   *pflag.FlagSet
	study   Study
	inStudy map[string]any
	run     Run
	faults  fault.List
}

// unknownVariables reports what looks like a setting in the environment but is none: a misspelt one would pass unnoticed.
func (r *runReader) unknownVariables() {
	var known []string
	for _, one := range runSettings() {
		known = append(known, variable(one.name))
	}
	names := os.Environ()
	slices.Sort(names)
	for _, pair := range names {
		name, _, _ := strings.Cut(pair, "=")
		if strings.HasPrefix(name, environmentPrefix) && !slices.Contains(known, name) {
			r.faults.Add(fault.Fault{Key: name, Found: "an environment variable that is no setting", Allowed: strings.Join(known, ", "), Nearest: fault.Nearest(name, known)})
		}
	}
}

// origin says where the value of a setting comes from.
func (r *runReader) origin(name string) string {
	_, inStudy := r.inStudy[name]
	switch {
	case r.flags.Changed(name):
		return "--" + name
	case os.Getenv(variable(name)) != "":
		return variable(name)
	case inStudy:
		return "search." + name
	}
	return "default"
}

// take reads one setting into its field.
func (r *runReader) take(one setting) {
	text := strings.TrimSpace(r.v.GetString(one.name))
	origin := r.origin(one.name)
	r.run.Origins[one.name] = origin
	bad := func(allowed string) {
		f := fault.Fault{Key: origin, Found: strconv.Quote(text), Allowed: allowed}
		if strings.HasPrefix(origin, "search.") {
			f = r.study.At(f)
		}
		r.faults.Add(f)
	}
	switch one.kind {
	case "count":
		value, err := strconv.Atoi(text)
		if err != nil || value < one.least || value > one.most {
			bad(fmt.Sprintf("a whole number from %d to %d", one.least, one.most))
			return
		}
		*r.count(one.name) = value
	case "seed":
		if origin == "default" {
			return
		}
		value, err := strconv.ParseUint(text, 10, 64)
		if err != nil {
			bad("a whole number from 0 to 18446744073709551615")
			return
		}
		r.run.Seed = &value
	case "switch":
		value, err := strconv.ParseBool(text)
		if err != nil {
			bad("true or false")
			return
		}
		*r.toggle(one.name) = value
	case "text":
		if text == "" && r.flags.Changed(one.name) {
			bad(map[string]string{"out": "the path of a folder", "scenario": "the name of a scenario of the study"}[one.name])
			return
		}
		*r.text(one.name) = text
	}
}

func (r *runReader) count(name string) *int {
	switch name {
	case "population":
		return &r.run.Population
	case "generations":
		return &r.run.Generations
	case "evaluations":
		return &r.run.Evaluations
	case "patience":
		return &r.run.Patience
	}
	return &r.run.Workers
}

func (r *runReader) text(name string) *string {
	if name == "scenario" {
		return &r.run.Scenario
	}
	return &r.run.Out
}

func (r *runReader) toggle(name string) *bool {
	switch name {
	case "replace":
		return &r.run.Replace
	case "json":
		return &r.run.JSON
	}
	return &r.run.NoColor
}
