// Command crossplumb serves the phone and the desk, and answers on the command line what they answer on a screen.
package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"os"
	"os/signal"
	"syscall"
)

// version is set when a release is built (-ldflags "-X main.version=…").
var version = "unreleased"

// streams are the three that a command talks through.
type streams struct {
	in       io.Reader
	out, err io.Writer
}

// command is one word of the command line.
type command struct {
	name string
	args string
	does string
	run  func(ctx context.Context, args []string, io streams) error
}

func commands() []command {
	return []command{
		{"serve", "--data DIR", "the server: phone page at /, desk page at /desk", runServe},
		{"demo", "", "the same on an invented company's jobs, this machine only", runDemo},
		{"judge", "SHEET.json", "the verdict on one mount sheet; status 0 go, 1 no-go, 2 measure again, 3 unreadable", plain(runJudge)},
		{"reckon", "OP", "one calculation, JSON in on stdin, JSON out; status 2 when it cannot be answered", plain(runReckon)},
		{"invite", "--data DIR --role ROLE", "a one-time link for a new person", runInvite},
		{"backup", "--data DIR --to FILE", "a proved copy, while the server runs", runBackup},
		{"restore", "--data DIR --from FILE", "puts a backup in place of the database, which is kept; the server must be stopped", runRestore},
		{"prove", "--data DIR", "checks the log's chain and the database; --rebuild derives every table again", runProve},
	}
}

// plain is a command that needs no context and gives its exit status itself.
func plain(run func(args []string, in io.Reader, out, err io.Writer) int) func(context.Context, []string, streams) error {
	return func(_ context.Context, args []string, io streams) error {
		return status(run(args, io.in, io.out, io.err))
	}
}

// status is an exit status with nothing more to say: the command has said it.
type status int

func (s status) Error() string { return fmt.Sprintf("exit status %d", int(s)) }

// usageError is a command line that cannot be read.
type usageError struct{ error }

// Exit statuses beside those that a command defines for itself.
const (
	exitFailed = 1
	exitUsage  = 2
)

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	code := run(ctx, os.Args[1:], streams{os.Stdin, os.Stdout, os.Stderr})
	stop()
	os.Exit(code)
}

func run(ctx context.Context, args []string, io streams) int {
	if len(args) == 0 {
		help(io.err)
		return exitUsage
	}
	switch args[0] {
	case "help", "-h", "--help":
		help(io.out)
		return 0
	case "version", "--version":
		fmt.Fprintln(io.out, "crossplumb", version)
		return 0
	}
	for _, c := range commands() {
		if c.name != args[0] {
			continue
		}
		return exitOf(c.run(ctx, args[1:], io), c, io.err)
	}
	fmt.Fprintf(io.err, "crossplumb: there is no command %q; crossplumb help lists them\n", args[0])
	return exitUsage
}

func exitOf(err error, c command, to io.Writer) int {
	var code status
	var usage usageError
	switch {
	case err == nil, errors.Is(err, flag.ErrHelp):
		return 0
	case errors.As(err, &code):
		return int(code)
	case errors.As(err, &usage):
		fmt.Fprintf(to, "crossplumb %s: %v\n", c.name, err)
		return exitUsage
	}
	fmt.Fprintf(to, "crossplumb %s: %v\n", c.name, err)
	return exitFailed
}

func help(to io.Writer) {
	fmt.Fprint(to, "crossplumb takes the readings of a multi-antenna mount and says what it will carry.\n\n")
	for _, c := range commands() {
		fmt.Fprintf(to, "  crossplumb %-34s %s\n", c.name+" "+c.args, c.does)
	}
	fmt.Fprint(to, "\ncrossplumb COMMAND --help lists the flags of one.\n"+
		"It computes mounts. It never says that a climb, a structure or an RF field is safe.\n")
}

// flags makes the flag set of a command; the environment gives what the line does not.
func flags(name string, io streams) *flag.FlagSet {
	f := flag.NewFlagSet("crossplumb "+name, flag.ContinueOnError)
	f.SetOutput(io.err)
	return f
}

func parse(f *flag.FlagSet, args []string) error {
	if err := f.Parse(args); err != nil {
		if errors.Is(err, flag.ErrHelp) {
			return err
		}
		return status(exitUsage) // the flag set has said what is wrong
	}
	if f.NArg() > 0 {
		return usageError{fmt.Errorf("%q is one word too many", f.Arg(0))}
	}
	return nil
}
