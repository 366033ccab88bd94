// Package render is the service without a server: it reviews files and prints answers for a reader.
package render

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"

	"google.golang.org/genproto/googleapis/rpc/errdetails"
	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/status"

	pb "floatrail/api/floatrail/v1"
	"floatrail/service/internal/wire"
)

// Exit statuses of a review.
const (
	ExitPass       = 0
	ExitFail       = 1
	ExitIncomplete = 2
	ExitFault      = 3
	ExitInternal   = 4
)

// ExitStatus documents the exit statuses.
const ExitStatus = `A file is a request of ReviewStage (it has "stage"), a board (it has "stages") or a bare stage; JSON in each case.

Exit status: 0 every stage is PASS; 1 a stage is FAIL; 2 a stage is INCOMPLETE and none is FAIL; 3 a file cannot be read or a request is at fault; 4 internal error. A higher status among 1, 3 and 4 takes precedence, and 1 over 2.`

// Reviewer answers requests of ReviewStage.
type Reviewer interface {
	ReviewStage(context.Context, *pb.ReviewStageRequest) (*pb.ReviewStageResponse, error)
}

// Options of a review.
type Options struct {
	Files          []string // - is Stdin
	JSON           bool     // one canonical answer a line instead of text
	Policy         string   // file of a policy that replaces those of the files; empty: none
	Families       []string // that replace those of the files; none: they stay
	All            bool     // also what passes and what does not apply
	PerPoint       bool     // every operating point of a finding
	Simulate       bool     // switching events, also where the files do not ask for it
	Stdin          io.Reader
	Stdout, Stderr io.Writer
}

// maxFile bounds a file [byte].
const maxFile = 32 << 20

// Review reviews the files and returns the exit status. Reports about bodies reach the reviewer through the context (wire.ReportOf).
func Review(ctx context.Context, reviewer Reviewer, o Options) int {
	r := &run{Options: o, reviewer: reviewer, decoder: wire.NewDecoder(), told: map[string]bool{}}
	if o.Policy != "" {
		r.policy = new(pb.Policy)
		if !r.readPolicy(o.Policy, r.policy) {
			return r.exit
		}
	}
	for _, file := range o.Files {
		if !r.file(ctx, file) {
			break
		}
	}
	if r.printed > 0 && !o.JSON {
		caution(o.Stdout, r.caution)
	}
	return r.exit
}

// run is the state of a review.
type run struct {
	Options
	reviewer Reviewer
	decoder  *wire.Decoder
	policy   *pb.Policy
	told     map[string]bool // faults that were printed
	exit     int
	printed  int
	caution  string
}

// precedence orders the exit statuses.
var precedence = [...]int{ExitPass: 0, ExitIncomplete: 1, ExitFail: 2, ExitFault: 3, ExitInternal: 4}

// ends notes an exit status; a graver one stays.
func (r *run) ends(exit int) {
	if precedence[exit] > precedence[r.exit] {
		r.exit = exit
	}
}

// refuse prints a fault of a file, each once.
func (r *run) refuse(file, field, description string) {
	r.ends(ExitFault)
	line := file + ": " + description
	if field != "" {
		line = file + ": " + field + ": " + description
	}
	if !r.told[line] {
		r.told[line] = true
		fmt.Fprintln(r.Stderr, line)
	}
}

// read reads a file whole.
func (r *run) read(file string) (data []byte, ok bool) {
	in := r.Stdin
	if file != "-" {
		f, err := os.Open(file)
		if err != nil {
			r.refuse(file, "", reason(err))
			return nil, false
		}
		defer func() { _ = f.Close() }()
		in = f
	}
	data, err := io.ReadAll(io.LimitReader(in, maxFile+1))
	switch {
	case err != nil:
		r.refuse(file, "", reason(err))
	case len(data) > maxFile:
		r.refuse(file, "", fmt.Sprintf("the file is larger than %d bytes", maxFile))
	default:
		return data, true
	}
	return nil, false
}

// reason is an error of the file system without the name of the file, which stands in front of it.
func reason(err error) string {
	var at *os.PathError
	if errors.As(err, &at) {
		return at.Err.Error()
	}
	return err.Error()
}

func (r *run) readPolicy(file string, into *pb.Policy) bool {
	data, ok := r.read(file)
	if !ok {
		return false
	}
	var report wire.Report
	r.decoder.Decode(data, into, &report)
	for _, f := range report.Faults {
		r.refuse(file, f.Field, f.Description)
	}
	return len(report.Faults) == 0
}

// file reviews the stages of one file; it is false where going on makes no sense.
func (r *run) file(ctx context.Context, file string) bool {
	data, ok := r.read(file)
	if !ok {
		return true
	}
	for _, item := range r.items(file, data) {
		answer, err := r.answer(wire.WithReport(ctx, item.report), r.request(item.request))
		switch status.Code(err) {
		case codes.OK:
			r.answered(file, answer)
		case codes.InvalidArgument:
			r.faults(file, item, err)
		default:
			fmt.Fprintf(r.Stderr, "%s: %v\n", file, err)
			r.ends(ExitInternal)
			if ctx.Err() != nil {
				return false
			}
		}
	}
	return true
}

// answer asks the reviewer; a panic is an error of this stage alone.
func (r *run) answer(ctx context.Context, q *pb.ReviewStageRequest) (a *pb.ReviewStageResponse, err error) {
	defer func() {
		if p := recover(); p != nil {
			err = status.Errorf(codes.Internal, "internal error: %v", p)
		}
	}()
	return r.reviewer.ReviewStage(ctx, q)
}

// request applies the flags.
func (r *run) request(q *pb.ReviewStageRequest) *pb.ReviewStageRequest {
	if r.policy != nil {
		q.Policy = r.policy
	}
	if len(r.Families) > 0 || r.PerPoint || r.Simulate {
		if q.Options == nil {
			q.Options = new(pb.Options)
		}
		if len(r.Families) > 0 {
			q.Options.Families = r.Families
		}
		if r.PerPoint {
			q.Options.PerPoint = &r.PerPoint
		}
		if r.Simulate {
			q.Options.Simulate = &r.Simulate
		}
	}
	return q
}

// answered prints an answer.
func (r *run) answered(file string, a *pb.ReviewStageResponse) {
	switch a.GetVerdict() {
	case pb.Verdict_FAIL:
		r.ends(ExitFail)
	case pb.Verdict_PASS:
	default:
		r.ends(ExitIncomplete)
	}
	if r.JSON {
		line, err := wire.Marshal(a)
		if err != nil {
			fmt.Fprintf(r.Stderr, "%s: %v\n", file, err)
			r.ends(ExitInternal)
			return
		}
		r.print(append(line, '\n'))
		return
	}
	p := &page{}
	if r.printed > 0 {
		p.blank()
	}
	p.stage(file, a, r.All)
	r.print(p.Bytes())
	r.printed++
	r.caution = a.GetCaution()
}

func (r *run) print(data []byte) {
	if _, err := r.Stdout.Write(data); err != nil {
		fmt.Fprintln(r.Stderr, err)
		r.ends(ExitInternal)
	}
}

// faults prints the faults of a request with the paths that they have in the file.
func (r *run) faults(file string, item item, err error) {
	for _, detail := range status.Convert(err).Details() {
		if bad, ok := detail.(*errdetails.BadRequest); ok {
			for _, v := range bad.GetFieldViolations() {
				r.refuse(file, item.path(v.GetField()), v.GetDescription())
			}
			return
		}
	}
	r.refuse(file, "", status.Convert(err).Message())
}
