package cli

import (
	"bytes"
	"context"
	"encoding/json"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

const small = "testdata/small.yaml"

// call runs the command in this process.
func call(ctx context.Context, args ...string) (code int, stdout, stderr string) {
	var out, err bytes.Buffer
	code = Run(ctx, args, &out, &err)
	return code, out.String(), err.String()
}

// TestWrongUsage: what a new user may mistype, the exit code and what the command says; nothing goes to standard output.
func TestWrongUsage(t *testing.T) {
	folder := t.TempDir()
	write := func(name, text string) string {
		path := filepath.Join(folder, name)
		if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
		return path
	}
	notOurs := filepath.Join(folder, "other")
	if err := os.MkdirAll(filepath.Join(notOurs, "x"), 0o700); err != nil {
		t.Fatal(err)
	}
	study, err := os.ReadFile(small)
	if err != nil {
		t.Fatal(err)
	}
	spoiled := func(name, old, replacement string) string {
		write("quotes.csv", "curve,attachment_probability,exhaustion_probability,expected_loss,rate_on_line\nall,0.1,0.04,0.065,0.14\n")
		if !strings.Contains(string(study), old) {
			t.Fatalf("the study does not hold %q", old)
		}
		return write(name, strings.Replace(string(study), old, replacement, 1))
	}
	for _, c := range []struct {
		args []string
		want string
	}{
		{[]string{"serch", small}, `no verb is named "serch"; there are look, fit, appraise, search; did you mean "search"?`},
		{[]string{"search"}, "search needs the path of a study"},
		{[]string{"look", small, small}, "look takes one study, not 2"},
		{[]string{"look", "--jsn", small}, "unknown flag --jsn; did you mean --json?"},
		{[]string{"look", "--workers", "x", small}, "--workers"},
		{[]string{"--jsn", "look", small}, "unknown flag --jsn; flags stand behind the verb"},
		{[]string{"look", "-x", small}, "unknown shorthand flag: 'x' in -x; see cedewright look --help"},
		{[]string{"search", small, "--out"}, "flag needs an argument: --out; see cedewright search --help"},
		{[]string{"appraise", small, "--generations", "3"}, "unknown flag --generations; see cedewright appraise --help"},
		{[]string{"help", "serch"}, `no verb is named "serch"`},
		{[]string{"look", filepath.Join(folder, "none.yaml")}, "none.yaml"},
		{[]string{"look", write("empty.yaml", "\n")}, "the file is empty"},
		{[]string{"look", write("binary.yaml", "\x00\x01")}, "binary"},
		{[]string{"look", folder}, "is a folder"},
		{[]string{"search", small, "--out", filepath.Join(folder, "no", "such")}, "is not there"},
		{[]string{"search", small, "--out", notOurs}, "which is not a result of this program"},
		{[]string{"search", small, "--out", small}, "is a file"},
		{[]string{"look", spoiled("key.yaml", "currency:", "curency:")}, `key.yaml:2:1: curency: unknown key`},
		{[]string{"appraise", spoiled("curve.yaml", "[100%], curve: all}", "[100%], curve: al}")}, `no curve is named "al"`},
		{[]string{"appraise", spoiled("peril.yaml", "kind: event-excess,", "kind: event-excess, perils: [strom],")}, `no peril of the book is named "strom"; allowed: ["storm" "attritional"]; did you mean "storm"?`},
		{[]string{"search", spoiled("measure.yaml", "  population: 30", "  keep: [{measure: ceded premum, at_most: 5m}]\n  population: 30")}, `"ceded premum" is not a measure`},
		{[]string{"search", spoiled("none.yaml", "search:", "notes: x\nserch:")}, "serch: unknown key"},
	} {
		code, stdout, stderr := call(context.Background(), c.args...)
		if code != wrong || stdout != "" || !strings.Contains(stderr, c.want) {
			t.Errorf("%q: exit %d, printed %q\n%s\nwant %s", c.args, code, stdout, stderr, c.want)
		}
		for _, line := range strings.Split(strings.TrimSpace(stderr), "\n") {
			if !strings.HasPrefix(line, "cedewright: ") {
				t.Errorf("%q: a line without prefix: %s", c.args, line)
			}
		}
	}
}

func TestVerbs(t *testing.T) {
	for verb, wants := range map[string][]string{
		"look":     {"Small book", "storm", "required capital, one-year", "not a regulatory filing"},
		"fit":      {"Curve all", "row 2", "left out", "wang", "chosen"},
		"appraise": {"no cover", "expiring", "= total cost", "layer 1", "40m xs 20m per event"},
		"search":   {"Buy “best found”", "Frontier", "What the figures leave out", "tower 1"},
	} {
		code, stdout, stderr := call(context.Background(), verb, small, "--workers", "2")
		if code != done {
			t.Errorf("%s: exit %d\n%s", verb, code, stderr)
		}
		for _, want := range wants {
			if !strings.Contains(stdout, want) {
				t.Errorf("%s does not say %q:\n%s", verb, want, stdout)
			}
		}
		if strings.Contains(stdout, "NaN") || strings.Contains(stdout, "Inf") {
			t.Errorf("%s prints what is no number:\n%s", verb, stdout)
		}
		if !strings.Contains(stderr, "cedewright: loading the book") {
			t.Errorf("%s tells no progress: %s", verb, stderr)
		}
	}
	if _, _, stderr := call(context.Background(), "look", small, "--quiet"); stderr != "" {
		t.Errorf("a quiet run says %q", stderr)
	}
	if code, stdout, _ := call(context.Background(), "--version"); code != done || !strings.HasPrefix(stdout, "cedewright ") {
		t.Errorf("version: exit %d, %q", code, stdout)
	}
}

func TestHelp(t *testing.T) {
	for _, args := range [][]string{nil, {"--help"}, {"help"}} {
		code, stdout, stderr := call(context.Background(), args...)
		if code != done || stderr != "" || !strings.Contains(stdout, "cedewright VERB STUDY") || !strings.Contains(stdout, "not a regulatory filing") {
			t.Errorf("%q: exit %d, %s%s", args, code, stdout, stderr)
		}
		last := -1
		for _, v := range verbs {
			at := strings.Index(stdout, "\n  "+v.name)
			if at <= last {
				t.Errorf("%q: the verb %s is out of its order:\n%s", args, v.name, stdout)
			}
			last = at
		}
		for _, line := range strings.Split(stdout, "\n") {
			if len(line) > 120 {
				t.Errorf("%q: a line of %d letters: %s", args, len(line), line)
			}
		}
	}
	for _, args := range [][]string{{"help", "search"}, {"search", "--help"}} {
		if code, stdout, _ := call(context.Background(), args...); code != done || !strings.Contains(stdout, "--patience") {
			t.Errorf("%q: exit %d, %s", args, code, stdout)
		}
	}
	if code, stdout, _ := call(context.Background(), "version"); code != done || !strings.HasPrefix(stdout, "cedewright ") {
		t.Errorf("version: exit %d, %q", code, stdout)
	}
}

// TestJSONContract: the fields on which scripts rely (the names are fixed).
func TestJSONContract(t *testing.T) {
	code, stdout, stderr := call(context.Background(), "search", small, "--json", "--quiet")
	if code != done {
		t.Fatalf("exit %d: %s", code, stderr)
	}
	var found map[string]any
	if err := json.Unmarshal([]byte(stdout), &found); err != nil {
		t.Fatal(err)
	}
	has := func(where string, value any, keys ...string) map[string]any {
		t.Helper()
		object, ok := value.(map[string]any)
		if !ok {
			t.Fatalf("%s is %T", where, value)
		}
		for _, key := range keys {
			if _, ok := object[key]; !ok {
				t.Errorf("%s has no %q", where, key)
			}
		}
		return object
	}
	has("the document", found, "study", "currency", "years", "gross", "programmes", "best", "frontier", "evaluations", "seed", "status")
	programmeKeys := []string{"name", "ceded_premium", "expected_recoveries", "reinstatement_premium", "commission", "ceded_margin", "capital", "capital_cost", "total_cost", "rent", "net_result", "treaties"}
	best := has("best", found["best"], programmeKeys...)
	has("net_result", best["net_result"], "mean", "sd", "one_in_10", "one_in_200")
	has("capital", best["capital"].([]any)[0], "standard", "gross", "net", "relief", "standard_error")
	has("treaty", best["treaties"].([]any)[1], "name", "kind", "premium", "rate_on_line", "expected_recovery", "attachment_probability", "exhaustion_probability", "margin", "relief", "retention", "limit", "share")
	for _, p := range found["programmes"].([]any) {
		has("programme", p, programmeKeys...)
	}
	if n := len(found["frontier"].([]any)); n < 5 {
		t.Errorf("%d programmes on the frontier", n)
	}
	_, again, _ := call(context.Background(), "search", small, "--json", "--quiet", "--workers", "3")
	if again != stdout {
		t.Error("another number of workers gives another document")
	}
	for _, verb := range []string{"look", "fit", "appraise"} {
		code, stdout, stderr := call(context.Background(), verb, small, "--json", "--quiet")
		if code != done || !json.Valid([]byte(stdout)) {
			t.Errorf("%s --json: exit %d, %s", verb, code, stderr)
		}
	}
}

func TestOut(t *testing.T) {
	out := filepath.Join(t.TempDir(), "run")
	code, _, stderr := call(context.Background(), "search", small, "--out", out, "--quiet")
	if code != done || !strings.Contains(stderr, "wrote "+out) {
		t.Fatalf("exit %d: %s", code, stderr)
	}
	for _, name := range []string{"result.json", "frontier.csv", "report.html"} {
		data, err := os.ReadFile(filepath.Join(out, name))
		if err != nil || len(data) == 0 {
			t.Errorf("%s: %v", name, err)
		}
		if name == "report.html" {
			for _, outside := range []string{"http://", "https://", "src=", "<script", "@import", "url("} {
				if strings.Contains(strings.ReplaceAll(string(data), `xmlns="http://www.w3.org/2000/svg"`, ""), outside) {
					t.Errorf("the paper reaches outside: %s", outside)
				}
			}
		}
		if name == "frontier.csv" && !strings.Contains(string(data), "capital_relief") {
			t.Errorf("frontier.csv starts %.80s", data)
		}
	}
	if code, _, stderr := call(context.Background(), "search", small, "--out", out, "--quiet"); code != wrong || !strings.Contains(stderr, "holds results already; allowed: another folder, or --replace") {
		t.Errorf("exit %d: %s", code, stderr)
	}
	if code, _, stderr := call(context.Background(), "search", small, "--out", out, "--replace", "--quiet"); code != done {
		t.Errorf("--replace: exit %d: %s", code, stderr)
	}
	entries, err := os.ReadDir(filepath.Dir(out))
	if err != nil || len(entries) != 1 {
		t.Errorf("beside the results stand %v (%v)", entries, err)
	}
	curves := filepath.Join(t.TempDir(), "fit")
	if code, _, stderr := call(context.Background(), "fit", small, "--out", curves, "--quiet"); code != done {
		t.Errorf("fit --out: exit %d: %s", code, stderr)
	} else if data, err := os.ReadFile(filepath.Join(curves, "curve-1-all.svg")); err != nil || !strings.HasPrefix(string(data), "<svg") {
		t.Errorf("picture of the curve: %v", err)
	}
}

// TestInterrupted: a search that is ended gives the best so far; a run that is ended before has nothing to show and leaves nothing.
func TestInterrupted(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	out := filepath.Join(t.TempDir(), "run")
	code, stdout, stderr := call(ctx, "search", small, "--out", out)
	if code != failed || stdout != "" || !strings.Contains(stderr, "interrupted before there was a result; nothing was written") {
		t.Errorf("exit %d, %q, %s", code, stdout, stderr)
	}
	if _, err := os.Stat(out); err == nil {
		t.Error("a folder was left behind")
	}
}

// TestInputsAreNotWritten: the files of a study are the same after every verb.
func TestInputsAreNotWritten(t *testing.T) {
	before := map[string]string{}
	for _, name := range []string{small, "testdata/quotes.csv"} {
		data, err := os.ReadFile(name)
		if err != nil {
			t.Fatal(err)
		}
		before[name] = string(data)
	}
	for _, verb := range []string{"look", "fit", "appraise"} {
		call(context.Background(), verb, small, "--quiet")
	}
	for name, text := range before {
		if data, err := os.ReadFile(name); err != nil || string(data) != text {
			t.Errorf("%s changed (%v)", name, err)
		}
	}
}
