// Package loss is where the power of the gate drive goes, and the temperatures that follow: gates, level shift, leakage and quiescent
// currents of the driver, conduction and recovery of the bootstrap diode, R_B, and the diode's leakage, which grows with the
// temperature that it causes.
//
// Powers are means over a period at the switching frequency f. All inputs are at their worst together where the worst is wanted; a NaN gives a
// NaN.
package loss
