package rpc

import (
	"strconv"
	"strings"

	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/status"

	pb "floatrail/api/floatrail/v1"
	"floatrail/service/internal/convert"
	"floatrail/service/internal/wire"
)

const (
	maxNamed = 3   // faults that the message of an error names; the details have all
	maxNamer = 240 // length of one of them in the message [character]
)

// refusal is the error of a request at fault: what the walk of the body found, then what binding found, without what follows from the
// former. It is nil without faults.
func refusal(walked *wire.Report, bound []convert.Fault) error {
	faults := bound
	if walked != nil && len(walked.Faults) > 0 {
		faults = merge(walked, bound)
	}
	if len(faults) == 0 {
		return nil
	}
	s := status.New(codes.InvalidArgument, summary(faults))
	detailed, err := s.WithDetails(convert.BadRequest(faults))
	if err != nil {
		// Descriptions are valid UTF-8 by construction; without the details the message still tells.
		return s.Err()
	}
	return detailed.Err()
}

func merge(walked *wire.Report, bound []convert.Fault) []convert.Fault {
	faults := make([]convert.Fault, 0, len(walked.Faults)+len(bound)+1)
	for _, f := range walked.Faults {
		faults = append(faults, convert.Fault{Field: f.Field, Description: f.Description})
	}
	if walked.More > 0 {
		faults = append(faults, convert.Fault{Field: wire.Body, Description: strconv.Itoa(walked.More) + " further faults of the body are not listed"})
	}
	if walked.Unread {
		return faults
	}
	for _, f := range bound {
		if !walked.Explains(f.Field) {
			faults = append(faults, f)
		}
	}
	return faults
}

// summary names the first faults for a reader of logs and terminals.
func summary(faults []convert.Fault) string {
	var b strings.Builder
	if len(faults) == 1 {
		b.WriteString("the request has a fault: ")
	} else {
		b.WriteString("the request has " + strconv.Itoa(len(faults)) + " faults: ")
	}
	for i, f := range faults[:min(len(faults), maxNamed)] {
		if i > 0 {
			b.WriteString("; ")
		}
		text := f.Field + ": " + f.Description
		if runes := []rune(text); len(runes) > maxNamer {
			text = string(runes[:maxNamer]) + "…"
		}
		b.WriteString(text)
	}
	if more := len(faults) - maxNamed; more > 0 {
		b.WriteString("; and " + strconv.Itoa(more) + " more in the details")
	}
	return b.String()
}

// Why a method takes no options about simulated switching events, or no traces.
const (
	noEvents   = "this method judges no switching events, ReviewStage and CheckTransientStress do"
	closedForm = "a study draws closed forms alone, ReviewStage and CheckTransientStress simulate"
	noFloating = "this method answers no floating voltages, ReviewStage and CheckDutyLimits do"
)

// notOffered refuses options that this build does not carry out, and with a reason also those about simulated events, and traces of V_BS: an option
// that is silently ignored looks like one that found nothing.
func notOffered(o *pb.Options, unsimulated, untraced string) []convert.Fault {
	var faults []convert.Fault
	for _, option := range []struct {
		name, why string
		read      bool
	}{
		{"fixes", "this build offers no search for fixes", o.GetFixes()},
		{"simulate", unsimulated, unsimulated != "" && o.GetSimulate()},
		{"waveforms", unsimulated, unsimulated != "" && o.GetWaveforms()},
		{"trace", untraced, untraced != "" && o.GetTrace()},
	} {
		if option.read {
			faults = append(faults, convert.Fault{Field: "options." + option.name, Description: "read true; " + option.why + ", expected false or absent"})
		}
	}
	return faults
}
