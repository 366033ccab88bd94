package startup

import "math"

// Order is the charge of the bootstrap capacitors of several equal stages from one reservoir, group after group: those whose charge has begun
// stay connected, the others wait with their V_BS as it is and take nothing. The supply brings its limit until V_DD is back, and
// then whatever is drawn. Values outside their comments and NaN give NaN.
type Order struct {
	Reservoir         // its Count is that of a group; a reservoir of +Inf holds V_DD
	Stages    int     // n, capacitors on the supply; at least 1
	Waits     bool    // each group starts when the one before has arrived, or has ended its rise where that never does
	Interval  float64 // between the starts of two groups, where they do not wait for each other, not negative [s]
	Target    float64 // V_BS at which a capacitor has arrived [V]
}

// Outcome is how a charge in groups goes.
type Outcome struct {
	Lowest float64 // lowest V_DD from the first start until the last group no longer pulls it down [V]
	Time   float64 // from the first start until the last capacitor has arrived; +Inf where one never does [s]
	Last   float64 // start of the last group; +Inf where one before it never arrives [s]
}

// Together is the same charge of all at once.
func (o Order) Together() Order {
	o.Count, o.Waits, o.Interval = o.Stages, false, 0
	return o
}

// OneByOne is the same charge with each capacitor waiting for the one before.
func (o Order) OneByOne() Order {
	o.Count, o.Waits = 1, true
	return o
}

// Groups is the number of groups that start after each other.
func (o Order) Groups() int {
	if !o.Waits && o.Interval == 0 || o.Count >= o.Stages {
		return 1
	}
	return (o.Stages + o.Count - 1) / o.Count
}

// Run follows the charge: eq. (2) with (4) in closed form where one group alone charges or where the supply holds V_DD, and the differential
// equations (5) while several groups at different voltages share the reservoir.
func (o Order) Run() Outcome {
	nan := math.NaN()
	bad := Outcome{nan, nan, nan}
	if !o.valid() || o.Stages < 1 || o.Target != o.Target || !o.Waits && !(o.Interval >= 0) {
		return bad
	}
	groups := o.Groups()
	if groups == 1 {
		o.Count = o.Stages
	}
	c := &course{o: &o, state: state{v: o.Supply}, low: o.Supply}
	if !o.Element.Switch && o.Element.Slope > leastSlope {
		c.saturation = math.Exp(o.Element.LogSaturation)
	}
	waiting := o.Stages
	out := Outcome{Last: nan}
	for g := range groups {
		n := min(waiting, o.Count)
		waiting -= n
		c.begin(float64(n))
		out.Last = c.t
		until := math.Inf(1)
		if g < groups-1 && !o.Waits {
			until = c.t + o.Interval
		}
		if !c.run(until, g == groups-1) {
			return bad
		}
	}
	out.Lowest, out.Time = c.low, c.arrived
	if groups == 1 && !math.IsInf(o.Reservoir.Reservoir, 1) {
		out.Lowest = o.Reservoir.Lowest()
	}
	if c.never {
		out.Time, out.Last = math.Inf(1), math.Inf(1)
		if groups == 1 {
			out.Last = 0
		}
	}
	return out
}
