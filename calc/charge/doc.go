// Package charge is the charge budget of a floating supply: what one period
// takes out of C_B, and the capacitance that a permitted drop of V_BS asks for.
//
// At the rising edge of the node Q_G, the off-bias charge, Q_LS, Q_rr and the
// junction charge of D_B leave C_B at once (Edge). The loads of the floating
// supply flow inside the intervals (Loads); the pull-down R_GS only while the
// high side is on. Together they are the per-cycle charge Q_B:
//
//	Q_B   = Q_G + Q_off + Q_LS + Q_rr + Q_j + I_0·T + V_BS·t_on/R_GS
//	ΔV    = V_DD - V_F - V_LS - V_required
//	C_min = Q_B/ΔV
//
// The equation is that of [ir2114], [an6076] and [dt98-2a], without their lump
// factors. All values are one corner: the caller picks the end of each spread.
// A value that is not known is NaN and makes every sum that needs it NaN; it
// never counts as zero. A part that is not fitted contributes 0.
package charge
