// Package startup is the first charge of bootstrap capacitors: its time, in one go or in pulses of the low side, its current,
// energy and end, and how far V_DD sags when several capacitors are charged at once from one reservoir.
//
// Every interval follows the exact law of package recharge, so nothing steps through time. The node stands at one voltage while
// C_B charges, normally 0 V. Below its lockout the driver is taken to draw its whole load I_0 already.
//
// # Continuous
//
// Time from the law with the drive E = V_DD - V_node; it ends where the element carries just I_0, which for a node that is
// pre-biased and never pulled low is V_DD - V_prebias less the drop. The textbook form R·C·ln(V_CC/(V_CC - V_BS - V_F - V_LS))
// [im393] sets the logarithm's numerator to V_CC where the charge of an empty capacitor through a fixed drop has V_CC - V_F - V_LS:
// it is late by R·C·ln(V_CC/(V_CC - V_F - V_LS)).
//
// # Pulsed
//
// In each period p the element conducts for the width w and then I_0 alone lowers V_BS by D = I_0·(p - w)/C_B. With δ = w/p the
// average u of this follows the same law with the load I_0/δ, and takes 1/δ times its time. Let e = V_BS - u in conducting time. It is
// pulled to 0, since the current falls as V_BS rises, rises by D over each pulse besides, and drops by D after it; so by induction
//
//	-D <= e <= D,   0 <= e at the end of each pulse                                                   (1)
//
// The average thus never needs fewer pulses than the truth, and never more than the truth to a target lower by D. That is no
// tight bound near the end of the charge: an average that never arrives may belong to pulses that do. PulsedTime therefore goes
// pulse by pulse through the first 64, whether it arrives at all is decided by one pulse from the target (the map of one
// period is increasing with slope below 1, so it has lifted V_BS to the target, or does so in the end, exactly if it lifts the target),
// and more than 64 pulses are skipped by an average that is centred: taken from the middle of one pause to the middle of another, where
// the splitting of the flow is symmetric and the error of the second order in w/(R·C), and with the load that puts its end at the exact
// periodic steady state. The last pulses are exact again.
//
// # Reservoir
//
// n capacitors C_B charge at once, each through its element, from C_VDD that starts at V_DD and receives I_s, the supply at its
// current limit:
//
//	C_VDD·dv_DD/dt = I_s - n·i,   C_B·dv_B/dt = i - I_0,   u = v_DD - v_B
//	C'·du/dt = -(i(u) - I'),   1/C' = n/C_VDD + 1/C_B,   I' = C'·(I_s/C_VDD + I_0/C_B)                   (2)
//
// which is the law of recharge with the capacitor C' and the load I'. I' lies between I_s/n and I_0, and i falls monotonically to it. So
// V_DD is lowest where n·i = I_s, if I_s >= n·I_0; from there on the supply carries the rest and what follows cannot be lower. A supply
// that delivers less than n·I_0, or nothing, is considered until V_BS ends its rise, i = I_0: what is drawn afterwards is no
// longer the charge of C_B. With the time t at which i comes to the greater of I_s/n and I_0, and u there,
//
//	V_low = [V_DD·C_VDD + n·C_B·(v_B0 + u) - (n·I_0 - I_s)·t]/(C_VDD + n·C_B)                           (3)
//
// With no load, no drop and no supply this is the charge balance V_DD·C_VDD/(C_VDD + n·C_B) for empty capacitors, to which a diode comes
// at its last microampere only. A load counts twice: u is larger for it, and the charge that it takes during the rise is missing.
//
// # Not included
//
// The driver's enable delay, which runs after V_BS has passed its lockout: 20 to 50 µs are published [slusce9b]. The energy lost
// while C charges from V through a resistance without a drop is C·V²/2 [slua887a, eq. 7]; ResistorEnergy is that of part of an element
// with a diode.
package startup
