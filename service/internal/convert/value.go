package convert

import (
	"math"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/quantity"
	"floatrail/calc/stage"
)

// number reads a single value; NaN after a fault.
func (w *walk) number(f *field, text, path string) float64 {
	return w.one(f, text, path, "")
}

// one reads a value that stands at path, or at its member name.
func (w *walk) one(f *field, text, path, name string) float64 {
	v, reading, err := quantity.Parse(text, f.declare.Dimension)
	switch {
	case err != nil:
		w.fault(w.at(path, name), err.Error())
		return math.NaN()
	case !within(v, f.declare):
		w.fault(w.at(path, name), refusal(quote(text), f.expect, "it is outside the plausible range"))
		return math.NaN()
	case reading != nil:
		w.readings = append(w.readings, Reading{w.at(path, name), reading.Text, reading.Meaning})
	}
	return v
}

func within(v float64, d *stage.Declaration) bool { return v >= d.Low && v <= d.High }

func (w *walk) at(path, name string) string {
	if name == "" {
		return path
	}
	return w.paths.member(path, name)
}

// quantity reads a value with its spread.
func (w *walk) quantity(f *field, in *pb.Quantity, out *stage.Quantity, path string) {
	*out = stage.Absent(path, f.declare)
	w.unknown(in.ProtoReflect(), path)
	if in.Source != nil {
		w.label(*in.Source, labelLimit("source"), path, "source")
		out.Source = *in.Source
	}
	given := in.Min != nil || in.Typ != nil || in.Max != nil
	if !given && len(in.At) == 0 {
		w.fault(path, refusal("nothing", "at least one of min, typ, max, at; each "+f.expect, ""))
		return
	}
	out.Triple = w.triple(f, in.Min, in.Typ, in.Max, path)
	if len(in.At) > maxAt {
		w.fault(w.paths.member(path, "at"), tooMany(len(in.At), maxAt))
		return
	}
	if len(in.At) > 0 {
		out.At = w.temperatures(f, in.At, given, path)
	}
}

// temperatures reads the entries of `at`, ascending in temperature.
func (w *walk) temperatures(f *field, in []*pb.AtTemperature, beside bool, path string) []stage.AtTemperature {
	list := w.paths.member(path, "at")
	out := make([]stage.AtTemperature, 0, len(in))
	last := math.Inf(-1) // [degC]
	for i, entry := range in {
		own := w.paths.element(list, i)
		if entry == nil {
			entry = &pb.AtTemperature{}
		}
		w.unknown(entry.ProtoReflect(), own)
		a := stage.AtTemperature{Temperature: math.NaN()}
		if entry.Temperature == nil {
			w.fault(w.paths.member(own, "temperature"), refusal("nothing", w.temperature.expect, ""))
		} else {
			a.Temperature = w.one(&w.temperature, *entry.Temperature, own, "temperature")
		}
		text := func(t float64) string { return quantity.Format(t, quantity.Temperature) }
		switch {
		case a.Temperature <= last:
			w.fault(w.paths.member(own, "temperature"), refusal(text(a.Temperature)+" after "+text(last), "ascending temperatures, each once", ""))
		case a.Temperature == stage.ReferenceTemperature && beside:
			w.fault(w.paths.member(own, "temperature"), refusal(text(a.Temperature)+" beside values that count at that temperature",
				"the values of one temperature once", ""))
		}
		if !math.IsNaN(a.Temperature) {
			last = a.Temperature
		}
		if entry.Min == nil && entry.Typ == nil && entry.Max == nil {
			w.fault(own, refusal("nothing", "at least one of min, typ, max; each "+f.expect, ""))
		}
		a.Triple = w.triple(f, entry.Min, entry.Typ, entry.Max, own)
		out = append(out, a)
	}
	return out
}

// triple reads min, typ and max. A tolerance after typ fills the ends.
func (w *walk) triple(f *field, low, typical, high *string, path string) stage.Triple {
	t := stage.Missing()
	before := len(w.faults)
	if low != nil {
		t.Min = w.one(f, *low, path, "min")
	}
	if typical != nil {
		w.typical(f, *typical, low != nil || high != nil, &t, path)
	}
	if high != nil {
		t.Max = w.one(f, *high, path, "max")
	}
	if len(w.faults) > before {
		return t
	}
	above := func(a, b *string, one, other string) {
		w.fault(path, refusal(one+" "+quote(*a)+" above "+other+" "+quote(*b), "min <= typ <= max", ""))
	}
	switch {
	case t.Min > t.Typ:
		above(low, typical, "min", "typ")
	case t.Typ > t.Max:
		above(typical, high, "typ", "max")
	case t.Min > t.Max:
		above(low, high, "min", "max")
	}
	return t
}

// typical reads typ with the tolerance that may follow it.
func (w *walk) typical(f *field, text string, beside bool, t *stage.Triple, path string) {
	d := f.declare.Dimension
	spread, reading, err := quantity.ParseTyp(text, d)
	switch {
	case err != nil:
		w.fault(w.paths.member(path, "typ"), err.Error())
		return
	case spread.HasTolerance && beside:
		w.fault(w.paths.member(path, "typ"), refusal(quote(text)+" beside min or max", "either a tolerance after typ, or min and max", ""))
		return
	case !within(spread.Value, f.declare):
		w.fault(w.paths.member(path, "typ"), refusal(quote(text), f.expect, "it is outside the plausible range"))
		return
	case !within(spread.Low, f.declare), !within(spread.High, f.declare):
		w.fault(w.paths.member(path, "typ"), refusal(quote(text), f.expect, "with the tolerance it reaches from "+
			quantity.Format(spread.Low, d)+" to "+quantity.Format(spread.High, d)))
		return
	}
	t.Typ = spread.Value
	if spread.HasTolerance {
		t.Min, t.Max = spread.Low, spread.High
		meaning := quantity.Format(spread.Value, d) + ", from " + quantity.Format(spread.Low, d) + " to " + quantity.Format(spread.High, d)
		w.readings = append(w.readings, Reading{w.paths.member(path, "typ"), text, meaning})
	} else if reading != nil {
		w.readings = append(w.readings, Reading{w.paths.member(path, "typ"), reading.Text, reading.Meaning})
	}
}
