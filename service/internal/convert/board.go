package convert

import (
	"reflect"
	"slices"
	"strconv"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc"
	"floatrail/calc/stage"
)

// BoardStage is one stage of a board: ready to be judged, or at fault.
type BoardStage struct {
	ID       string
	Request  calc.Request
	Readings []Reading
	Faults   []Fault
}

// ReviewBoard binds a request of ReviewBoard. Faults inside one stage stand with that stage and leave the others intact; those returned
// beside the stages refuse the request. Readings are those of the parts. The stages of one gate supply count as sharing it.
func (b *Binder) ReviewBoard(r *pb.ReviewBoardRequest) ([]BoardStage, []Reading, []Fault) {
	w := &walk{Binder: b}
	w.unknown(r.ProtoReflect(), "request")
	w.bindParts(r.GetParts())
	request := w.common(common{r.GetParts(), r.GetPolicy(), r.GetWaivers(), r.AsOf, r.GetOptions()})
	switch n := len(r.GetStages()); {
	case n == 0:
		w.fault("stages", refusal("nothing", "at least one stage", ""))
	case n > maxStages:
		w.fault("stages", tooMany(n, maxStages))
		return nil, w.readings, report(w.faults)
	}
	out := make([]BoardStage, len(r.GetStages()))
	for i, st := range r.GetStages() {
		own := &walk{Binder: b, parts: w.parts}
		path := own.paths.element("stages", i)
		s := own.stageAt(st, path)
		if s.GateSupply.StagesSharing != 0 {
			own.fault(path+".gateSupply.stagesSharing", refusal(strconv.Itoa(s.GateSupply.StagesSharing), "nothing",
				"on a board the stages with the same gateSupply.id count"))
		}
		out[i] = BoardStage{ID: s.ID, Request: request, Readings: own.readings, Faults: report(own.faults)}
		out[i].Request.Stage = s
		out[i].Request.Waivers = slices.Clone(request.Waivers)
	}
	w.names(out)
	w.supplies(out)
	return out, w.readings, report(w.faults)
}

// names demands a name of its own of every stage.
func (w *walk) names(stages []BoardStage) {
	first := make(map[string]int, len(stages))
	for i := range stages {
		path := w.paths.element("stages", i) + ".id"
		switch before, taken := first[stages[i].ID]; {
		case stages[i].ID == "":
			w.fault(path, refusal("nothing", "a name, unique on the board", ""))
		case taken:
			w.fault(path, refusal(quote(stages[i].ID), "a name of its own", "stages["+strconv.Itoa(before)+"] has it already"))
		default:
			first[stages[i].ID] = i
		}
	}
}

// supplies demands that stages with the same gate supply agree on it where they speak of it, and counts them.
func (w *walk) supplies(stages []BoardStage) {
	first := map[string]int{}
	sharing := map[string]int{}
	shape := w.Binder.stage.field("gateSupply").shape
	for i := range stages {
		g := &stages[i].Request.Stage.GateSupply
		if g.ID == "" {
			continue
		}
		sharing[g.ID]++
		before, seen := first[g.ID]
		if !seen {
			first[g.ID] = i
			continue
		}
		other := &stages[before].Request.Stage.GateSupply
		if field := conflict(shape, reflect.ValueOf(other).Elem(), reflect.ValueOf(g).Elem()); field != "" {
			w.fault(g.Field+"."+field, refusal("another value than "+other.Field+"."+field, "agreement on the supply "+quote(g.ID), ""))
		}
	}
	for i := range stages {
		if g := &stages[i].Request.Stage.GateSupply; g.ID != "" {
			g.StagesSharing = sharing[g.ID]
		}
	}
}

// conflict is the first field, as a path, of which two components say different things; empty where there is none.
func conflict(s *shape, a, b reflect.Value) string {
	for i := range s.fields {
		f := &s.fields[i]
		x, y := a.FieldByIndex(f.index), b.FieldByIndex(f.index)
		switch f.kind {
		case kindQuantity, kindValue:
			if differ(x.Addr().Interface().(*stage.Quantity), y.Addr().Interface().(*stage.Quantity)) {
				return f.name
			}
		case kindMessage:
			if inner := conflict(f.shape, x, y); inner != "" {
				return f.name + "." + inner
			}
		case kindList:
			x, y = x.Field(1), y.Field(1)
			if x.Len() == 0 || y.Len() == 0 {
				continue
			}
			if x.Len() != y.Len() {
				return f.name
			}
			for j := range x.Len() {
				if conflict(f.shape, x.Index(j), y.Index(j)) != "" {
					return f.name
				}
			}
		case kindLabel, kindEnum:
			if x.String() != "" && y.String() != "" && x.String() != y.String() {
				return f.name
			}
		}
	}
	return ""
}

// differ tells whether two quantities are given and not the same.
func differ(a, b *stage.Quantity) bool {
	return a.Given() && b.Given() && (!same(a.Triple, b.Triple) || !slices.EqualFunc(a.At, b.At, func(x, y stage.AtTemperature) bool {
		return x.Temperature == y.Temperature && same(x.Triple, y.Triple)
	}))
}

// same compares triples; what neither gives is the same.
func same(a, b stage.Triple) bool {
	equal := func(x, y float64) bool { return x == y || x != x && y != y }
	return equal(a.Min, b.Min) && equal(a.Typ, b.Typ) && equal(a.Max, b.Max)
}
