// Command barrow measures distances between distributions on one network, and
// says how wrong they can be. "barrow help" is its manual.
package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/signal"
	"strings"
	"syscall"

	"example.org/barrow/dual/pairwise"
	"example.org/barrow/exact"
	"example.org/barrow/graphio"
)

const version = "0.1.0"

func main() { os.Exit(run(os.Args[1:], os.Stdin, os.Stdout, os.Stderr)) }

// Exit codes.
const (
	done        = 0
	failed      = 1
	badInput    = 2 // or bad usage
	interrupted = 130
)

// run is the whole command: arguments and streams in, exit code out. Ctrl-C ends
// the work at the next good moment, a second one at once.
func run(args []string, stdin io.Reader, stdout, stderr io.Writer) int {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	defer stop()
	context.AfterFunc(ctx, stop)
	s := &session{ctx: ctx, stdout: stdout, stderr: stderr}
	err := s.dispatch(args)
	s.progress.end()
	return s.fail(err)
}

// A session is one run of the command.
type session struct {
	ctx            context.Context
	stdout, stderr io.Writer
	command        string
	progress       progress
	phases         pairwise.Phases
	kept           string // the journal of a run that can go on
}

// commands lists what barrow does, in the order of its manual.
var commands = []struct {
	name string
	help string
	run  func(*session, []string) error
}{
	{"inspect", inspectHelp, (*session).inspect},
	{"matrix", matrixHelp, (*session).matrix},
	{"pair", pairHelp, (*session).pair},
	{"rank", rankHelp, (*session).rank},
	{"test", testHelp, (*session).testSamples},
	{"noise", noiseHelp, (*session).noise},
	{"shape", shapeHelp, (*session).shape},
	{"series", seriesHelp, (*session).series},
	{"demo", demoHelp, (*session).demo},
}

func (s *session) dispatch(args []string) error {
	if len(args) == 0 {
		return usageError{"no command"}
	}
	name, rest := args[0], args[1:]
	if strings.HasPrefix(name, "--replay") {
		var err error
		if name, err = replayedCommand(args); err != nil {
			return err
		}
		rest = args
	}
	switch name {
	case "help", "--help", "-h":
		return s.help(rest)
	case "version", "--version":
		_, err := fmt.Fprintf(s.stdout, "barrow %s\n", version)
		return err
	}
	for _, c := range commands {
		if c.name == name {
			s.command = name
			if asksHelp(rest) {
				_, err := io.WriteString(s.stdout, c.help)
				return err
			}
			return c.run(s, rest)
		}
	}
	return usageError{fmt.Sprintf("%q is no command%s", name, didYouMean(name, commandNames()))}
}

func (s *session) help(rest []string) error {
	text := mainHelp
	if len(rest) > 0 {
		text = ""
		for _, c := range commands {
			if c.name == rest[0] {
				text = c.help
			}
		}
		if text == "" {
			return usageError{fmt.Sprintf("no help on %q%s", rest[0], didYouMean(rest[0], commandNames()))}
		}
	}
	_, err := io.WriteString(s.stdout, text)
	return err
}

func asksHelp(args []string) bool {
	for _, a := range args {
		if a == "--" {
			return false
		}
		if a == "--help" || a == "-h" {
			return true
		}
	}
	return false
}

func commandNames() []string {
	names := []string{"help", "version"}
	for _, c := range commands {
		names = append(names, c.name)
	}
	return names
}

// A usageError is a command line that cannot be followed.
type usageError struct{ text string }

func (e usageError) Error() string { return e.text }

// errReported ends a run whose problems have been shown already.
var errReported = errors.New("problems were found")

// fail is the one place that turns errors into messages and exit codes.
func (s *session) fail(err error) int {
	name := "barrow"
	if s.command != "" {
		name += " " + s.command
	}
	var faults *graphio.Faults
	var usage usageError
	var memory *pairwise.MemoryError
	switch {
	case err == nil:
		return done
	case errors.Is(err, errReported):
		return badInput
	case errors.Is(err, context.Canceled):
		left := "no results were written"
		if s.command == "demo" {
			left = "the files that are there are whole"
		}
		if _, err := os.Stat(s.kept); s.kept != "" && err == nil {
			left = fmt.Sprintf("what was solved is kept in %s, and the same command goes on from there", s.kept)
		}
		fmt.Fprintf(s.stderr, "%s: interrupted; %s\n", name, left)
		return interrupted
	case errors.As(err, &usage):
		fmt.Fprintf(s.stderr, "%s: %v\n(%s --help says what it takes)\n", name, err, name)
		return badInput
	case errors.As(err, &faults):
		if faults.Total == 1 {
			fmt.Fprintf(s.stderr, "%s: %v\n", name, err)
		} else {
			fmt.Fprintf(s.stderr, "%s: %d problems in the input\n  %s\n", name, faults.Total, strings.ReplaceAll(err.Error(), "\n", "\n  "))
		}
		return badInput
	case errors.As(err, &memory), badDesign(err), errors.Is(err, pairwise.ErrMethod), errors.Is(err, exact.ErrTotals), errors.Is(err, exact.ErrUnreachable):
		fmt.Fprintf(s.stderr, "%s: %v\n", name, err)
		return badInput
	}
	fmt.Fprintf(s.stderr, "%s: %v\n", name, err)
	return failed
}

// note puts a warning on stderr.
func (s *session) note(text string) {
	s.progress.end()
	fmt.Fprintf(s.stderr, "barrow: note: %s\n", text)
}
