package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/signal"
	"regexp"
	"strings"
	"syscall"
	"time"

	"github.com/alecthomas/kong"
)

// cli is the command line: a field for every verb, one file each.
type cli struct {
	Serve   serveCmd   `cmd:"" help:"Keep the marks and guide all phones on board."`
	Pair    pairCmd    `cmd:"" help:"Ask the running server for a link that lets one more phone in."`
	Backup  backupCmd  `cmd:"" help:"Copy everything that is stored to a file, while the server runs."`
	Bearing bearingCmd `cmd:"" help:"Range and bearing from one position to another."`
	Drift   driftCmd   `cmd:"" help:"Where a person has drifted to, and how far that may be off."`
	Legs    legsCmd    `cmd:"" help:"Lay out the legs of a search."`
	Turn    turnCmd    `cmd:"" help:"The helm orders of a turn back to a person."`
	Version versionCmd `cmd:"" help:"Print the version."`
}

const about = `Wakeback gets a crew back to a person who went overboard. A phone takes the mark; the program on board keeps it, and shows every phone where to steer.

Call for help first: press the distress button or call Mayday on VHF channel 16. This program calls nobody, and what it shows is never a reason to stop searching.`

// env is what a verb has around it.
type env struct {
	ctx      context.Context // ends when the program is told to stop
	out, err io.Writer
	now      func() time.Time
}

// The exit codes.
const (
	exitOK       = 0
	exitFailure  = 1
	exitBadInput = 2
)

// errInput is wrapped by every error about what was asked for.
var errInput = errors.New("bad input")

// inputError says which argument is bad, and why.
type inputError struct {
	arg string
	err error
}

func (e *inputError) Error() string   { return e.arg + ": " + plain(e.err.Error()) }
func (e *inputError) Unwrap() []error { return []error{errInput, e.err} }

func badInput(arg string, err error) error { return &inputError{arg, err} }

// exited is what leaves kong when it has printed help.
type exited int

// run is the whole program but for the process: it returns the exit code.
func run(args []string, stdout, stderr io.Writer) (code int) {
	var c cli
	k, err := kong.New(&c, kong.Name("wakeback"), kong.Description(about), kong.Writers(stdout, stderr),
		kong.Vars{"listen": defaultListen}, kong.ExplicitGroups([]kong.Group{{Key: "tls", Title: "TLS:"}}),
		kong.Exit(func(code int) { panic(exited(code)) }), kong.ConfigureHelp(kong.HelpOptions{Compact: true, WrapUpperBound: 88}))
	if err != nil {
		return fail(stderr, err)
	}
	defer func() {
		if r := recover(); r != nil {
			e, ok := r.(exited)
			if !ok {
				panic(r)
			}
			code = int(e)
		}
	}()
	if len(args) == 0 {
		args = []string{"--help"}
	}
	ctx, err := k.Parse(signed(args))
	if err != nil {
		fmt.Fprintf(stderr, "wakeback: %s\nFor what is expected: wakeback%s --help\n", plain(err.Error()), verbOf(err))
		return exitBadInput
	}
	stop, cancel := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	defer cancel()
	if err := ctx.Run(&env{stop, stdout, stderr, time.Now}); err != nil {
		return fail(stderr, err)
	}
	return exitOK
}

// verbOf is the verb that was given when parsing failed, with a blank before
// it.
func verbOf(err error) string {
	var p *kong.ParseError
	if errors.As(err, &p) && p.Context != nil && p.Context.Command() != "" {
		verb, _, _ := strings.Cut(p.Context.Command(), " ")
		return " " + verb
	}
	return ""
}

func fail(stderr io.Writer, err error) int {
	fmt.Fprintln(stderr, "wakeback:", err)
	if isInput(err) {
		return exitBadInput
	}
	return exitFailure
}

// minus is the sign that stands for a hyphen before a figure, so that a
// southern position is not taken for a flag. The parsers read both.
const minus = "\u2212"

var signedFigure = regexp.MustCompile(`^-[0-9.]`)

func signed(args []string) []string {
	out := make([]string, len(args))
	for i, a := range args {
		if signedFigure.MatchString(a) {
			a = minus + a[1:]
		}
		out[i] = a
	}
	return out
}

// plain is a message with the hyphen as it was typed.
func plain(s string) string { return strings.ReplaceAll(s, minus, "-") }
