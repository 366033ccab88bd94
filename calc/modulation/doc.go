// Package modulation is the floating supply where no two switching periods are alike: over the fundamental of a sinusoidal modulation, over a
// revolution in six-step operation, over a burst and its pause. It lays the periods out and finds their periodic solution.
//
// # Layout
//
// A carrier period begins where the high side turns on or would turn on, a dead time after its command. The duty d and the load current i are
// sampled there and stay for the period:
//
//	d >= 1                              high side on for T
//	d·T - t_dt < shortest pulse         low side on for T; its diode, where the low side is one
//	(1 - d)·T - t_dt < shortest pulse   low side off for the gap T - t_on
//	else                                on, dead time, low side on, dead time
//
// The node is low with the low side on; and while its diode carries a sourcing current, i > 0, in the dead time after the high side turned off once
// the current has carried the charge 2·Q_oss of the node, in the one before it turns on, and in a gap. While the low side is on it stands at -i·R, or
// at the drops of an IGBT by the sign of i; in freewheeling at -V_SD(i). Wherever it is not low the element blocks and the loads alone draw.
// Where the node has risen before the high side turns on (sinking, i < 0), what the loads take in between is drawn with the edge.
//
// Charges leave with the edges that happen: gate and level shift as the high side turns on from off; Q_rr and the junction's charge as the node
// rises; the latter returns as it falls. A period on throughout has neither, nor one low throughout beside another such.
//
// # Modulation
//
//	d(θ) = 1/2 + [m·sin θ + z(θ)]/2, clipped to [0, 1],   i(θ) = I·sin(θ - φ)                         (1)
//
// with z = 0; m·sin 3θ/6; -(max + min)/2 of the three references; 1 - max; -1 - min; or of the last two the one whose reference is larger (a clamp
// of 60°, centred on the peak of the phase). N = f_sw/f_1, rounded up, so that a hold is not taken too short. Six-step operation works the
// high side for a third, opens the node for a sixth, works the low side for a third and opens it again; a chopped switch does not alternate with its
// opposite. A burst is periods of one duty, then a pause with both switches off and the node at a voltage of its own.
//
// # Periodic solution
//
// With V_BS = v before the edge of period k, recharge.Period carries it to the next, v(k+1) = F(v(k); k). F increases in v, so their composition
// over all N periods does, and its fixed point is found as for one period: Newton's method with the analytic derivative, kept in a bracket. No
// positive fixed point, or V_BS at 0 V anywhere, is a collapse.
//
// A composition period by period would cost N evaluations of F, 16,000 for 16 kHz at 1 Hz, at every corner. Along a run of periods of one form the law
// F(·; k) is smooth in k, however fast F itself forgets where it came from: v(k) is then either slow or follows the fixed point of F(·; k). A step over
// M periods therefore takes v for a cubic p in k through the known v at its start, with
//
//	p(x_j + 1) = F(p(x_j); x_j)   at   x_j = (M - 1)·c_j,  c = (4 - √6)/10, (4 + √6)/10, 1               (2)
//
// the nodes of Radau IIA with three stages (Hairer and Wanner, Solving Ordinary Differential Equations II, 1996, IV.5, from memory). The last node is the last period, so that the step ends by the exact law; for F near the
// identity (2) is collocation of a differential equation (methods of many revolutions: Calvo, Jay, Montijano, Rández, Numerische Mathematik 97, 2004,
// from memory), for F that forgets at once it is interpolation. For M = 4 at 0, 1, 2, 3 it would be the
// composition itself. What p misses at two other periods, over the periods for which it is remembered, controls M. Runs end where the form changes or
// the law bends: at kinks of the zero sequence, at clips, vanishing pulses, changes of sign of the current. Their first period, after another form, is
// taken by itself, and so are short runs.
//
// The lowest V_BS is looked for downhill among the whole periods of the steps that may contain it, each by the exact law.
//
// # Accuracy
//
// Within 0.3 mV of the composition of every period, over testdata/reference/modulation.json, over 16,000 periods and over random legs; the composition
// itself within 0.2 mV of SciPy's integration in that file, of which 0.17 mV are that the junction's charge returns at the end of the on-time instead
// of a wait later.
//
// # Not included
//
// The current's ripple within a gap or a sector; what the current does that dies away after a sector of six-step operation; the difference between
// sampled and natural modulation, of the order of one carrier period; interlocks between the legs.
package modulation
