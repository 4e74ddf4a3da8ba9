package cli

import (
	"context"
	"errors"
	"fmt"
	"io"
	"runtime"
	"strings"

	"cedewright/cmd/internal/report"
	"cedewright/cmd/internal/settings"
	"cedewright/portfolio/fault"

	"github.com/spf13/cobra"
)

// Exit codes.
const (
	done   = 0
	failed = 1
	wrong  = 2 // usage or study
)

// usageError is a mistake in how the command was called.
type usageError struct{ error }

// Run runs the command with these arguments and gives its exit code. It prints results to stdout, all else to stderr, and never panics.
func Run(ctx context.Context, args []string, stdout, stderr io.Writer) int {
	return guarded(stderr, func() int {
		root := command(stdout, stderr)
		root.SetArgs(args)
		root.SetOut(stdout)
		root.SetErr(stderr)
		return tell(stderr, root.ExecuteContext(ctx))
	})
}

// guarded runs a function and turns its panic into a short message and the exit code of a failure.
func guarded(stderr io.Writer, run func() int) (code int) {
	defer func() {
		if cause := recover(); cause != nil {
			fmt.Fprintf(stderr, "cedewright: internal error%s: %v\n", whereFrom(), cause)
			fmt.Fprintln(stderr, "cedewright: please report it with the study that caused it; nothing was written")
			code = failed
		}
	}()
	return run()
}

// whereFrom names the place in this program where a panic began; it is called while the panic is being recovered.
func whereFrom() string {
	places := make([]uintptr, 64)
	frames := runtime.CallersFrames(places[:runtime.Callers(2, places)])
	panicked := false
	for {
		f, more := frames.Next()
		panicked = panicked || f.Function == "runtime.gopanic"
		if panicked && strings.HasPrefix(f.Function, "cedewright/") {
			return fmt.Sprintf(" in %s, line %d", f.Function, f.Line)
		}
		if !more {
			return ""
		}
	}
}

// tell prints an error, every fault on a line of its own, and gives the exit code.
func tell(stderr io.Writer, err error) int {
	if err == nil {
		return done
	}
	var usage usageError
	faults := fault.All(err)
	switch {
	case len(faults) > 0:
		for _, f := range faults {
			fmt.Fprintf(stderr, "cedewright: %v\n", f)
		}
		if len(faults) > 1 {
			fmt.Fprintf(stderr, "cedewright: %d faults\n", len(faults))
		}
		return wrong
	case errors.As(err, &usage):
		fmt.Fprintf(stderr, "cedewright: %v\n", err)
		return wrong
	case errors.Is(err, context.Canceled):
		fmt.Fprintln(stderr, "cedewright: interrupted before there was a result; nothing was written")
		return failed
	}
	for _, line := range strings.Split(err.Error(), "\n") { // errors may be joined
		fmt.Fprintf(stderr, "cedewright: %s\n", line)
	}
	return failed
}

// command builds the tree of commands.
func command(stdout, stderr io.Writer) *cobra.Command {
	root := &cobra.Command{
		Use:           "cedewright VERB STUDY",
		SilenceErrors: true, SilenceUsage: true,
		Version: report.Version(),
		Args:    unknownVerb,
		Run:     func(*cobra.Command, []string) { rootHelp(stdout) },
	}
	setHelp(root, stdout)
	root.SetVersionTemplate("{{.Version}}\n")
	root.CompletionOptions.HiddenDefaultCmd = true
	root.SetFlagErrorFunc(func(c *cobra.Command, err error) error { return usageError{unknownFlag(c, err)} })
	for _, v := range verbs {
		one := &cobra.Command{
			Use:   v.name + " STUDY",
			Short: v.short,
			Args:  oneStudy,
			RunE: func(c *cobra.Command, args []string) error {
				return runVerb(c.Context(), v, c, args[0], stdout, stderr)
			},
		}
		settings.AddFlags(one.Flags())
		one.Flags().Bool("quiet", false, "no progress on standard error")
		if v.name == "search" {
			settings.AddSearchFlags(one.Flags())
		}
		root.AddCommand(one)
	}
	return root
}
