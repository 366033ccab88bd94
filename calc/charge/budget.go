package charge

import "math"

// The names of the budget's items, in the order of Items.
const (
	ItemGate             = "gate charge"
	ItemOffBias          = "off-bias charge"
	ItemLevelShift       = "level shift"
	ItemRecovery         = "diode recovery"
	ItemJunction         = "diode junction"
	ItemQuiescent        = "quiescent current"
	ItemOffsetLeakage    = "offset leakage"
	ItemGateLeakage      = "gate leakage"
	ItemDiodeLeakage     = "diode leakage"
	ItemCapacitorLeakage = "capacitor leakage"
	ItemClampLeakage     = "clamp leakage"
	ItemOther            = "other load"
	ItemPullDown         = "gate pull-down"
)

// ItemNames lists the names in the order of Items.
func ItemNames() []string {
	items := Items(Loads{}, Edge{}, Interval{})
	names := make([]string, len(items))
	for i := range items {
		names[i] = items[i].Name
	}
	return names
}

// Edge is the charge that leaves C_B at once when the node rises.
type Edge struct {
	Gate       float64 // Q_G at the actual drive, all parallel devices [C]
	OffBias    float64 // charge from the off bias to 0 V, all parallel devices [C]
	LevelShift float64 // Q_LS of one cycle [C]
	Recovery   float64 // Q_rr of D_B at the current that still flows [C]
	Junction   float64 // Q_j of D_B; comes back at the falling edge [C]
}

// Total returns what C_B loses at the rising edge [C], the junction charge
// included.
func (e Edge) Total() float64 {
	return e.Gate + e.OffBias + e.LevelShift + e.Recovery + e.Junction
}

// Consumed returns what the edges of one period take for good [C]: Total
// without the junction charge, which the falling edge returns.
func (e Edge) Consumed() float64 {
	return e.Gate + e.OffBias + e.LevelShift + e.Recovery
}

// Share returns a share of each charge, as where the edge does not occur in every period.
func (e Edge) Share(share float64) Edge {
	return Edge{Gate: e.Gate * share, OffBias: e.OffBias * share, LevelShift: e.LevelShift * share, Recovery: e.Recovery * share, Junction: e.Junction * share}
}

// Interval is the time over which the loads are counted.
type Interval struct {
	Period  float64 // time for which the constant currents flow, one period [s]
	OnTime  float64 // part of it in which the high side is on [s]
	Voltage float64 // V_BS across the pull-down during OnTime [V]
}

// Item is one line of the charge budget.
type Item struct {
	Name   string  // one of the Item constants
	Charge float64 // charge out of C_B in one period [C]
}

// Items returns the budget of one period, always all items in the same order:
// the charges of the edge first, then each load times the time for which it
// flows. The junction charge stands with its full value because the drop during
// the on-time contains it, although the falling edge returns it.
func Items(loads Loads, edge Edge, over Interval) []Item { return AppendItems(nil, loads, edge, over) }

// AppendItems appends the items to dst.
func AppendItems(dst []Item, loads Loads, edge Edge, over Interval) []Item {
	t := over.Period
	return append(dst, []Item{
		{ItemGate, edge.Gate},
		{ItemOffBias, edge.OffBias},
		{ItemLevelShift, edge.LevelShift},
		{ItemRecovery, edge.Recovery},
		{ItemJunction, edge.Junction},
		{ItemQuiescent, loads.Quiescent * t},
		{ItemOffsetLeakage, loads.OffsetLeakage * t},
		{ItemGateLeakage, loads.GateLeakage * t},
		{ItemDiodeLeakage, loads.DiodeLeakage * t},
		{ItemCapacitorLeakage, loads.CapacitorLeakage * t},
		{ItemClampLeakage, loads.ClampLeakage * t},
		{ItemOther, loads.Other * t},
		{ItemPullDown, loads.PullDown * over.Voltage * over.OnTime},
	}...)
}

// Total returns the per-cycle charge Q_B [C], the sum of the items in their
// order. It sets the drop of V_BS.
func Total(items []Item) float64 {
	sum := 0.0
	for _, item := range items {
		sum += item.Charge
	}
	return sum
}

// Consumed returns the charge [C] that the recharge has to replace in every
// period: Total without the junction charge. Times the switching frequency it
// is the average current of D_B.
func Consumed(items []Item) float64 {
	sum := 0.0
	for _, item := range items {
		if item.Name != ItemJunction {
			sum += item.Charge
		}
	}
	return sum
}

// Margin is a distance that a limit is to be kept by: the greater of an
// absolute part and a fraction of the limit.
type Margin struct {
	Absolute float64 // smallest distance [V]
	Relative float64 // distance as a fraction of the limit [1]
}

// RequiredVoltage returns V_required [V]: the higher of the falling lockout
// V_UV-,max [V] and the drive voltage at which the switch is specified [V], plus
// the margin. Either being NaN makes it NaN.
func RequiredVoltage(lockout, drive float64, margin Margin) float64 {
	limit := math.Max(lockout, drive)
	return limit + math.Max(margin.Absolute, margin.Relative*limit)
}

// VoltageBudget is what lies between the supply and the lowest V_BS allowed.
type VoltageBudget struct {
	Supply      float64 // V_DD, its smallest value in the worst case [V]
	ElementDrop float64 // V_F of the recharge element [V]
	NodeLow     float64 // V_LS, node while the low side conducts: + sinking, - sourcing [V]
	Required    float64 // V_required [V]
}

// Available returns ΔV = V_DD - V_F - V_LS - V_required [V]. A negative V_LS,
// the load current flowing out of the node, adds to it. It is 0 or negative
// when V_DD cannot meet the requirement at all.
func (b VoltageBudget) Available() float64 {
	return b.Supply - b.ElementDrop - b.NodeLow - b.Required
}

// AllowedDrop returns the ΔV [V] that sizes C_B: the available voltage [V], or
// the policy's ripple [V] if that is smaller.
func AllowedDrop(available, ripple float64) float64 {
	return math.Min(available, ripple)
}

// MinimumCapacitance returns the smallest capacitance Q/ΔV [F] that keeps the
// drop caused by a charge [C] within drop [V] (the equation of [an6076],
// [ir2114] and [l6386e]). ok is false when none does, drop being 0 or negative:
// the result is then +Inf. It is false with NaN when either argument is NaN or
// the charge is negative.
func MinimumCapacitance(charge, drop float64) (capacitance float64, ok bool) {
	switch {
	case math.IsNaN(drop) || !(charge >= 0):
		return math.NaN(), false
	case drop <= 0:
		return math.Inf(1), false
	}
	return charge / drop, true
}

// Drop returns the drop ΔV = Q/C [V] of V_BS that a charge [C] causes on a
// capacitance [F].
func Drop(charge, capacitance float64) float64 {
	return charge / capacitance
}
