// Package startup is the first charge of bootstrap capacitors: its time, in one go or in pulses of the low side, its current,
// energy and end, and how far V_DD sags when several capacitors are charged from one reservoir, at once or group after group.
//
// Every interval follows the exact law of package recharge, and nothing steps through time but the charge of several groups of capacitors that share
// a reservoir at different voltages, for which there is no closed form. The node stands at one voltage while C_B charges, normally 0 V. Below its lockout the
// driver is taken to draw its whole load I_0 already.
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
// # Groups
//
// Order charges n capacitors in groups of k, a group starting at each multiple of an interval, or as soon as the one before has arrived at the
// target. A group that has not started takes nothing; one that has stays connected with its load I_0. The supply brings I_s while
// V_DD lies below its nominal value V_0 and, once there, whatever is drawn up to I_s. V_DD and V_BS carry over from group to group. With
// u = v_DD - v_B from the law, the charge of (2) gives both at any time:
//
//	v_B = [C_VDD·(v_DD0 - u) + n·C_B·v_B0 + (I_s - n·I_0)·t]/(C_VDD + n·C_B),   v_DD = v_B + u          (4)
//
// so that three phases have a closed form: one group charges while the diodes of all others block, which hold but for I_0·t/C_B (a group counts
// as blocked below 1e-5 of the charging current); the groups have come to one voltage, and are one; the supply holds V_DD at V_0,
// and each capacitor charges by itself. Where a phase ends - V_DD at V_0, V_BS at the target, another diode conducting again - is the root of an
// expression in t. What remains, m groups at different voltages that conduct together,
//
//	C_VDD·dv_DD/dt = I_s - Σ n_k·i(v_DD - v_k),   C_B·dv_k/dt = i(v_DD - v_k) - I_0                     (5)
//
// does not separate and is integrated by the stiff method of calc/internal/numeric to 0.2 mV a step, 20 µV in all; voltages within 1 mV are
// one, and of more than eight the two closest are taken together with their charge.
//
// Every rate in (5) rises with every other state, so by Kamke's comparison theorem (from memory) a state that is nowhere higher than another
// one never becomes higher anywhere: less supply and more load never raise V_DD or a V_BS; a capacitor that started earlier
// never stands lower than one that started later, so the last one to start is the last one to arrive; and once nothing rises any more,
// nothing ever will. Of the start times this says nothing: an order that waits starts its groups later where V_DD is low.
//
// One after another is not the safer order by itself. When V_DD falls for a later group, the diodes of the earlier ones keep what those took; without
// a supply V_DD ends at V_0·(C_VDD/(C_VDD + C_B))^n, below V_0·C_VDD/(C_VDD + n·C_B). What it gains is time for the supply.
//
// # Not included
//
// The driver's enable delay, which runs after V_BS has passed its lockout: 20 to 50 µs are published [slusce9b]. The energy lost
// while C charges from V through a resistance without a drop is C·V²/2 [slua887a, eq. 7]; ResistorEnergy is that of part of an element
// with a diode.
package startup
