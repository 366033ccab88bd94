// Package capacitor is what is left of a capacitor in service: its dielectric
// class, the effective capacitance, its leakage and its derated voltage.
//
//	C_eff = C·(1 + tolerance)·(1 + temperature)·(bias)·(ageing)
//
// The factors are multiplied, never added. Tolerance and temperature are signed
// relative changes: negative for the smallest capacitance, positive for the
// largest. The temperature change is the class limit in full at every
// temperature in the range [eia-198, iec-60384-22].
package capacitor
