package cli

import (
	"errors"
	"fmt"
	"io"
	"strings"

	"cedewright/cmd/internal/report"
	"cedewright/portfolio/fault"

	"github.com/spf13/cobra"
)

// rootHelp says what the program does, verb by verb, in the order in which a study is worked on.
func rootHelp(w io.Writer) {
	fmt.Fprint(w, `cedewright reads one study of a reinsurance renewal (losses, quotes, programmes, capital standards) and says
what each programme costs and frees, and which one of a decision space is best.

Usage: cedewright VERB STUDY [flags]

`)
	for _, v := range verbs {
		fmt.Fprintf(w, "  %-10s %s\n", v.name, v.short)
	}
	fmt.Fprintf(w, `
cedewright VERB --help lists the flags of a verb, cedewright --version tells the version.
Results go to standard output, all else to standard error. Exit codes: 0 done, 1 failed, 2 wrong usage or study.

%s
`, strings.Replace(report.Caution, "; local", ";\nlocal", 1))
}

// setHelp gives the program its own words of help, and wrong words a message.
func setHelp(root *cobra.Command, stdout io.Writer) {
	ofVerb := root.HelpFunc()
	root.SetHelpFunc(func(c *cobra.Command, args []string) {
		if c == root {
			rootHelp(stdout)
			return
		}
		ofVerb(c, args)
	})
	root.SetHelpCommand(&cobra.Command{
		Use:    "help [VERB]",
		Short:  "Show what a verb does",
		Hidden: true,
		RunE: func(_ *cobra.Command, args []string) error {
			if len(args) == 0 {
				rootHelp(stdout)
				return nil
			}
			c, _, err := root.Find(args[:1])
			if err != nil || c == root {
				return unknownVerb(root, args)
			}
			return c.Help()
		},
	})
	root.AddCommand(&cobra.Command{
		Use: "version", Short: "Tell the version", Hidden: true, Args: cobra.ArbitraryArgs,
		Run: func(*cobra.Command, []string) { fmt.Fprintln(stdout, report.Version()) },
	})
}

func oneStudy(c *cobra.Command, args []string) error {
	switch len(args) {
	case 1:
		return nil
	case 0:
		return usageError{fmt.Errorf("%s needs the path of a study, such as configs/marram-coast.yaml", c.Name())}
	}
	return usageError{fmt.Errorf("%s takes one study, not %d: %q", c.Name(), len(args), args)}
}

func unknownVerb(_ *cobra.Command, args []string) error {
	if len(args) == 0 {
		return nil
	}
	names := make([]string, len(verbs))
	for i, v := range verbs {
		names[i] = v.name
	}
	text := fmt.Sprintf("no verb is named %q; there are %s", args[0], strings.Join(names, ", "))
	if near := fault.Nearest(args[0], names); near != "" {
		text += fmt.Sprintf("; did you mean %q?", near)
	}
	return usageError{errors.New(text)}
}

// unknownFlag adds to a complaint about flags the nearest flag and where to read on.
func unknownFlag(c *cobra.Command, err error) error {
	hint := fmt.Sprintf("see %s --help", c.CommandPath())
	if !c.HasParent() {
		hint = "flags stand behind the verb, as in: cedewright search STUDY --json"
	}
	name, ok := strings.CutPrefix(err.Error(), "unknown flag: --")
	if !ok {
		return fmt.Errorf("%w; %s", err, hint)
	}
	var names []string
	for _, field := range strings.Fields(c.Flags().FlagUsages()) {
		if flag, ok := strings.CutPrefix(field, "--"); ok {
			names = append(names, flag)
		}
	}
	if near := fault.Nearest(name, names); near != "" {
		return fmt.Errorf("unknown flag --%s; did you mean --%s?", name, near)
	}
	return fmt.Errorf("unknown flag --%s; %s", name, hint)
}
