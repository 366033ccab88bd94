package render

import (
	"encoding/json"
	"strconv"
	"strings"

	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
	"floatrail/service/internal/wire"
)

// item is one stage of a file as a request.
type item struct {
	request *pb.ReviewStageRequest
	report  *wire.Report
	stage   string // path of the stage in the file; empty: the file is the stage
}

// path is a path of the request as the file has it.
func (i item) path(field string) string {
	rest, ok := strings.CutPrefix(field, "stage")
	if !ok || rest != "" && rest[0] != '.' {
		return field
	}
	return strings.TrimPrefix(i.stage+rest, ".")
}

// items reads a file by its outermost members: with `stages` it is a board, with a member that only requests have it is a request of
// ReviewStage, else a bare stage.
func (r *run) items(file string, data []byte) []item {
	switch members := outermost(data); {
	case members["stages"] && !members["stage"]:
		return r.board(file, data)
	case members["stage"], members["stages"], members["parts"], members["policy"], members["waivers"], members["asOf"], members["as_of"], members["options"]:
		request, report := new(pb.ReviewStageRequest), new(wire.Report)
		r.decoder.Decode(data, request, report)
		return []item{{request, report, "stage"}}
	}
	stage, report := new(pb.Stage), new(wire.Report)
	r.decoder.Decode(data, stage, report)
	return []item{{&pb.ReviewStageRequest{Stage: stage}, report.Rebase("", "stage", ""), ""}}
}

// outermost are the names of the outermost members; none where the text is no object.
func outermost(data []byte) map[string]bool {
	var members map[string]json.RawMessage
	if json.Unmarshal(data, &members) != nil {
		return nil
	}
	names := make(map[string]bool, len(members))
	for name := range members {
		names[name] = true
	}
	return names
}

// board splits a board into requests, one a stage, after checking what concerns several of them.
func (r *run) board(file string, data []byte) []item {
	var b pb.ReviewBoardRequest
	var report wire.Report
	r.decoder.Decode(data, &b, &report)
	if report.Unread {
		for _, f := range report.Faults {
			r.refuse(file, f.Field, f.Description)
		}
		return nil
	}
	if len(b.GetStages()) == 0 && !report.Explains("stages") {
		report.Add("stages", "read nothing, expected at least one stage")
	}
	shared := r.together(file, b.GetStages())
	for _, f := range report.Faults {
		// Faults within a stage are told with its own.
		if !strings.HasPrefix(f.Field, "stages[") {
			r.refuse(file, f.Field, f.Description)
		}
	}
	items := make([]item, len(b.GetStages()))
	for i, s := range b.GetStages() {
		at := "stages[" + strconv.Itoa(i) + "]"
		if g := s.GetGateSupply(); g != nil && g.StagesSharing == nil && shared[g.GetId()] > 1 {
			g.StagesSharing = proto.Int32(shared[g.GetId()])
		}
		items[i] = item{
			request: &pb.ReviewStageRequest{Parts: b.GetParts(), Stage: s, Policy: b.GetPolicy(), Waivers: b.GetWaivers(), AsOf: b.AsOf, Options: proto.CloneOf(b.GetOptions())},
			report:  report.Rebase(at, "stage", "stages"),
			stage:   at,
		}
	}
	return items
}

// together checks what stages of one board must agree on and counts the stages on each supply.
func (r *run) together(file string, stages []*pb.Stage) (sharing map[string]int32) {
	ids, supplies := map[string]int{}, map[string]int{}
	sharing = map[string]int32{}
	for i, s := range stages {
		at := "stages[" + strconv.Itoa(i) + "]."
		if id := s.GetId(); id != "" {
			if first, twice := ids[id]; twice {
				r.refuse(file, at+"id", "read the id of stages["+strconv.Itoa(first)+"] again, expected an id of its own")
			} else {
				ids[id] = i
			}
		}
		id := s.GetGateSupply().GetId()
		if id == "" {
			continue
		}
		sharing[id]++
		first, known := supplies[id]
		if !known {
			supplies[id] = i
		} else if !proto.Equal(stages[first].GetGateSupply(), s.GetGateSupply()) {
			r.refuse(file, at+"gateSupply", "read other values than in stages["+strconv.Itoa(first)+"] under the same id, expected the same")
		}
	}
	return sharing
}
