// Command floatrail checks bootstrapped floating supplies of high-side gate drivers. Without a sub-command it serves the checks over REST and
// gRPC; `review` applies them to files without a server.
//
// The exit status of every sub-command but `review` is 0 on success, 2 for faulty flags and 1 for any other failure. That of `review` is
// documented there.
package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"log/slog"
	"os"
	"os/signal"
	"runtime/debug"
	"syscall"

	"github.com/alecthomas/kong"
	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
	"floatrail/service/internal/config"
	"floatrail/service/internal/render"
	"floatrail/service/internal/rpc"
	"floatrail/service/internal/wire"
)

// commands is the command line.
type commands struct {
	Serve   serveCommand   `cmd:"" default:"withargs" help:"Serve REST, gRPC and operations (default)."`
	Review  reviewCommand  `cmd:"" help:"Review stage and board files without a server."`
	Rules   rulesCommand   `cmd:"" help:"List the rule catalogue."`
	Fields  fieldsCommand  `cmd:"" help:"Print the reference of request fields: units, ranges and what absence means."`
	Version versionCommand `cmd:"" help:"Print the version."`
}

// environment is what a command may touch of the world.
type environment struct {
	ctx            context.Context
	stdin          io.Reader
	stdout, stderr io.Writer
}

// gcPercent lets the heap grow further between collections than Go's default: a review leaves little behind, and the memory limit
// (GOMEMLIMIT) bounds it in a container. GOGC, where set, prevails.
const gcPercent = 400

func main() {
	if os.Getenv("GOGC") == "" {
		debug.SetGCPercent(gcPercent)
	}
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	// After the first signal the second one ends the process at once.
	context.AfterFunc(ctx, stop)
	os.Exit(execute(&environment{ctx: ctx, stdin: os.Stdin, stdout: os.Stdout, stderr: os.Stderr}, os.Args[1:]))
}

// exitError is an error with the exit status that it causes.
type exitError struct {
	status int
	err    error
}

func (e *exitError) Error() string {
	if e.err == nil {
		return ""
	}
	return e.err.Error()
}

const (
	exitFailure = 1
	exitFlags   = 2
)

// execute runs one command line and returns the exit status.
func execute(env *environment, args []string) (exit int) {
	type asked int
	defer func() {
		// Kong exits to print help; here that is a panic.
		if p := recover(); p != nil {
			code, ok := p.(asked)
			if !ok {
				panic(p)
			}
			exit = int(code)
		}
	}()
	parser, err := kong.New(&commands{}, kong.Name("floatrail"), kong.DefaultEnvars("FLOATRAIL"), kong.Writers(env.stdout, env.stderr),
		kong.Description("Worst-case checks of bootstrapped floating supplies of high-side gate drivers. Every flag can also be set by the environment variable shown with it."),
		kong.Exit(func(code int) { panic(asked(code)) }), kong.Bind(env), kong.UsageOnError())
	if err != nil {
		fmt.Fprintln(env.stderr, "floatrail:", err)
		return exitFailure
	}
	command, err := parser.Parse(args)
	if err != nil {
		fmt.Fprintln(env.stderr, "floatrail:", err)
		fmt.Fprintln(env.stderr, "Run `floatrail --help` for the commands and flags.")
		if len(args) > 0 && args[0] == "review" {
			return render.ExitFault
		}
		return exitFlags
	}
	err = command.Run()
	var e *exitError
	switch {
	case err == nil:
		return 0
	case errors.As(err, &e):
		if e.err != nil {
			fmt.Fprintln(env.stderr, "floatrail:", e.err)
		}
		return e.status
	}
	fmt.Fprintln(env.stderr, "floatrail:", err)
	return exitFailure
}

type serveCommand struct{ config.Flags }

// Run serves until the context ends.
func (c *serveCommand) Run(env *environment) error {
	valid, err := config.Parse(c.Flags)
	if err != nil {
		return &exitError{exitFlags, err}
	}
	log := slog.New(slog.NewJSONHandler(env.stderr, &slog.HandlerOptions{Level: valid.LogLevel}))
	s, err := newServer(valid, log, func(o rpc.Options) pb.FloatRailServer { return rpc.New(o) })
	if err != nil {
		return err
	}
	fmt.Fprintf(env.stdout, "floatrail %s\n  REST        http://%s/v1/rules\n  gRPC        %s\n  operations  http://%s/metrics /livez /readyz /buildinfo\n",
		version, s.listeners.http.Addr(), s.listeners.grpc.Addr(), s.listeners.ops.Addr())
	return s.run(env.ctx)
}

type reviewCommand struct {
	Files    []string `arg:"" name:"file" help:"Files with a stage, a request of ReviewStage or a board {parts, stages}; - is the standard input."`
	Format   string   `enum:"text,json" default:"text" help:"text for a reader, json for one canonical answer a line."`
	Policy   string   `placeholder:"FILE" help:"Policy that replaces those of the files."`
	Families []string `placeholder:"FAMILY" help:"Families of rules to evaluate, instead of those of the files."`
	All      bool     `help:"Also show rules that pass or do not apply."`
	PerPoint bool     `help:"Show every operating point of a finding."`
	Simulate bool     `help:"Simulate the switching events instead of estimating them."`
}

// Help documents the exit status.
func (*reviewCommand) Help() string { return render.ExitStatus }

// Run reviews the files.
func (c *reviewCommand) Run(env *environment) error {
	status := render.Review(env.ctx, rpc.New(rpc.Options{Version: version, Carried: wire.ReportOf}), render.Options{
		Files: c.Files, JSON: c.Format == "json", Policy: c.Policy, Families: c.Families, All: c.All, PerPoint: c.PerPoint, Simulate: c.Simulate,
		Stdin: env.stdin, Stdout: env.stdout, Stderr: env.stderr,
	})
	if status != 0 {
		return &exitError{status: status}
	}
	return nil
}

type rulesCommand struct {
	Format string `enum:"text,json" default:"text" help:"text or json."`
}

// Run lists the catalogue.
func (c *rulesCommand) Run(env *environment) error {
	handlers := rpc.New(rpc.Options{Version: version})
	if c.Format == "json" {
		answer, err := handlers.ListRules(env.ctx, nil)
		if err != nil {
			return err
		}
		return printJSON(env.stdout, answer)
	}
	return render.Rules(env.stdout, handlers.Rules())
}

func printJSON(w io.Writer, m proto.Message) error {
	line, err := wire.Marshal(m)
	if err == nil {
		_, err = w.Write(append(line, '\n'))
	}
	return err
}

type fieldsCommand struct{}

// Run prints the reference of fields.
func (*fieldsCommand) Run(env *environment) error { return render.Fields(env.stdout) }

type versionCommand struct{}

// Run prints what was built.
func (*versionCommand) Run(env *environment) error {
	b := build()
	_, err := fmt.Fprintf(env.stdout, "floatrail %s (rule set %s, %s, revision %s)\n", b.Version, b.RuleSet, b.Go, orUnknown(b.Revision))
	return err
}

func orUnknown(s string) string {
	if s == "" {
		return "unknown"
	}
	return s
}
