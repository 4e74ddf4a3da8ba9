package settings_test

import (
	"os"
	"strings"
	"testing"

	"cedewright/cmd/internal/settings"
	"cedewright/optimize"
	"cedewright/portfolio/fault"

	"github.com/spf13/pflag"
)

// cleanEnvironment takes every variable of this program out of the environment of a test.
func cleanEnvironment(t *testing.T) {
	t.Helper()
	for _, pair := range os.Environ() {
		name, _, _ := strings.Cut(pair, "=")
		if strings.HasPrefix(name, "CEDEWRIGHT_") || name == "NO_COLOR" {
			t.Setenv(name, "") // restored afterwards
			os.Unsetenv(name)
		}
	}
}

func flagsOf(t *testing.T, arguments ...string) *pflag.FlagSet {
	t.Helper()
	flags := pflag.NewFlagSet("search", pflag.ContinueOnError)
	settings.AddFlags(flags)
	settings.AddSearchFlags(flags)
	if err := flags.Parse(arguments); err != nil {
		t.Fatal(err)
	}
	return flags
}

func ptr[T any](x T) *T { return &x }

func TestRunTakesDefaults(t *testing.T) {
	cleanEnvironment(t)
	run, err := settings.ReadRun(flagsOf(t), settings.Study{})
	if err != nil {
		t.Fatal(err)
	}
	if run.Workers < 1 || run.Seed != nil || run.Out != "" || run.Replace || run.JSON || run.NoColor {
		t.Errorf("defaults: %+v", run)
	}
	if run.Population != optimize.DefaultPopulation || run.Generations != optimize.DefaultGenerations ||
		run.Evaluations != optimize.DefaultEvaluations || run.Patience != optimize.DefaultPatience {
		t.Errorf("budget is not that of the search: %+v", run)
	}
	for name, origin := range run.Origins {
		if origin != "default" {
			t.Errorf("%s comes from %s", name, origin)
		}
	}
}

// TestRunPrecedence sets one value in ever more places: a flag wins over the environment, which wins over the study, which wins over the
// default.
func TestRunPrecedence(t *testing.T) {
	study := settings.Study{Search: &settings.Search{Seed: ptr(settings.Seed(3)), Patience: ptr(settings.Count(33))}}
	for _, c := range []struct {
		name        string
		environment map[string]string
		arguments   []string
		study       settings.Study
		seed        uint64
		patience    int
		origin      string
	}{
		{"study", nil, nil, study, 3, 33, "search.seed"},
		{"environment", map[string]string{"CEDEWRIGHT_SEED": "2", "CEDEWRIGHT_PATIENCE": "22"}, nil, study, 2, 22, "CEDEWRIGHT_SEED"},
		{"flag", map[string]string{"CEDEWRIGHT_SEED": "2", "CEDEWRIGHT_PATIENCE": "22"}, []string{"--seed=1", "--patience", "11"}, study, 1, 11, "--seed"},
		{"empty environment", map[string]string{"CEDEWRIGHT_SEED": ""}, nil, study, 3, 33, "search.seed"},
		{"largest seed", nil, []string{"--seed", "18446744073709551615"}, study, 18446744073709551615, 33, "--seed"},
		{"seed 0 is an ordinary seed", nil, []string{"--seed", "0"}, study, 0, 33, "--seed"},
	} {
		t.Run(c.name, func(t *testing.T) {
			cleanEnvironment(t)
			for name, value := range c.environment {
				t.Setenv(name, value)
			}
			run, err := settings.ReadRun(flagsOf(t, c.arguments...), c.study)
			if err != nil {
				t.Fatal(err)
			}
			if run.Seed == nil || *run.Seed != c.seed || run.Patience != c.patience || run.Origins["seed"] != c.origin {
				t.Errorf("got seed %v, patience %d, origin %q; want %d, %d, %q", run.Seed, run.Patience, run.Origins["seed"], c.seed, c.patience, c.origin)
			}
		})
	}
}

func TestRunSwitches(t *testing.T) {
	cleanEnvironment(t)
	t.Setenv("CEDEWRIGHT_JSON", "1")
	t.Setenv("NO_COLOR", "yes")
	run, err := settings.ReadRun(flagsOf(t, "--out", "results", "--replace"), settings.Study{})
	if err != nil {
		t.Fatal(err)
	}
	if !run.JSON || !run.NoColor || !run.Replace || run.Out != "results" {
		t.Errorf("got %+v", run)
	}
	run, err = settings.ReadRun(flagsOf(t, "--json=false", "--no-color=false"), settings.Study{})
	if err != nil {
		t.Fatal(err)
	}
	if run.JSON || run.NoColor {
		t.Errorf("a flag does not win over the environment: %+v", run)
	}
}

// TestRunPassesOverAbsentFlags reads the settings of a verb that has no search flags.
func TestRunPassesOverAbsentFlags(t *testing.T) {
	cleanEnvironment(t)
	flags := pflag.NewFlagSet("look", pflag.ContinueOnError)
	settings.AddFlags(flags)
	if flags.Lookup("population") != nil {
		t.Error("look has a flag of the search")
	}
	run, err := settings.ReadRun(flags, settings.Study{})
	if err != nil || run.Population != optimize.DefaultPopulation {
		t.Errorf("got %+v, %v", run, err)
	}
}

// TestRunReportsEveryFault gives bad values in every place at once; each fault names the place.
func TestRunReportsEveryFault(t *testing.T) {
	cleanEnvironment(t)
	for name, value := range map[string]string{
		"CEDEWRIGHT_WORKERS": "many", "CEDEWRIGHT_WORKER": "2", "CEDEWRIGHT_JSON": "perhaps", "CEDEWRIGHT_EVALUATIONS": "1e6",
	} {
		t.Setenv(name, value)
	}
	study := settings.Study{File: "study.yaml", Search: &settings.Search{Generations: ptr(settings.Count(0))}}
	_, err := settings.ReadRun(flagsOf(t, "--seed=-1", "--population", "3", "--patience", "3.0", "--replace"), study)
	got := map[string]string{}
	for _, f := range fault.All(err) {
		got[f.Key] = f.Error()
	}
	for key, want := range map[string]string{
		"CEDEWRIGHT_WORKER":      `did you mean "CEDEWRIGHT_WORKERS"?`,
		"CEDEWRIGHT_WORKERS":     `"many"; allowed: a whole number from 1 to 4096`,
		"CEDEWRIGHT_JSON":        `"perhaps"; allowed: true or false`,
		"CEDEWRIGHT_EVALUATIONS": `"1e6"; allowed: a whole number from 1 to 100000000`,
		"search.generations":     `study.yaml: search.generations: "0"; allowed: a whole number from 1 to 1000000`,
		"--seed":                 `"-1"; allowed: a whole number from 0 to 18446744073709551615`,
		"--population":           `"3"; allowed: a whole number from 4 to 10000`,
		"--patience":             `"3.0"; allowed: a whole number from 1 to 1000000`,
		"--replace":              `given without --out`,
	} {
		if !strings.Contains(got[key], want) {
			t.Errorf("%s: got %q, want %q in it", key, got[key], want)
		}
		delete(got, key)
	}
	for key, message := range got {
		t.Errorf("unexpected fault %s: %s", key, message)
	}
}
