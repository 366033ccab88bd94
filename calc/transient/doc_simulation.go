// Package transient also simulates, where a closed form does not decide.
//
// # Simulation
//
// A Simulator solves one Event of a Bridge as an initial value problem and takes its results from the dense output. The circuit: bus - R1 - L1 -
// high side - node - low side - L2 - R2 - COM, a constant load current I out of the node, and on the node, through R_VS, the driver's V_S pin with
// C_pin to COM, the node clamp from COM, and C_B, the other end of which, the floating rail, takes the bootstrap element's current from V_DD. The
// drives step at t = 0. i1 flows from the bus, i2 from COM, both into the node; every gate current flows into its gate.
//
// Each inductance has its share of R_p beside it, R_p1 = R_p·L1/(L1 + L2) and R_p2 alike, so that both have the time constant of the loop; the
// switch carries both, and R1, R2 in series with both:
//
//	j1 = i1 + u1/R_p1,   j2 = i2 + u2/R_p2                                                                         (17)
//	u1 = L1·di1/dt = V_BUS - v_ds1 - v_node - R1·j1,   u2 = L2·di2/dt = v_ds2 - v_node - R2·j2                     (18)
//
// The gate current of the high side comes from the pin or the rail, flows through the gate to the node and back through R_VS. So the current
// from the pin to the node is what load, branches and gate leave:
//
//	v_pin - v_node = R_VS·(I - j1 - j2 - i_g1)                                                                     (19)
//
// The part L_cs of each inductance lies between source and drive return; di/dt takes its share of u from the gate of the high side, whose
// source it raises against the node, and adds it to that of the low side, whose source it lowers against COM:
//
//	R_g1·i_g1 = v_drive1 + v_pin - v_node - v_gs1 - (L_cs1/L1)·u1                                                  (20)
//	R_g2·i_g2 = v_drive2 - v_gs2 + (L_cs2/L2)·u2                                                                   (21)
//
// v_drive1 is v_BS (less a bias taken out of it) while driven on, else the off bias. All of this is linear. With g = 1/R_p of each inductance,
// k = 1/(1 + R·g), a1 = V_BUS - v_ds1 - R1·i1, a2 = v_ds2 - R2·i2 it is u = k·(a - v_node), and (19) with (20) is one equation for v_node:
//
//	v_node·[1 + R_VS·(k1·g1 + k2·g2 + (1 - k1·L_cs1/L1)/R_g1)]
//	    = v_pin - R_VS·[I - i1 - i2 - k1·g1·a1 - k2·g2·a2 - (v_drive1 + v_pin - v_gs1 - k1·(L_cs1/L1)·a1)/R_g1]    (22)
//
// whose bracket is at least 1: v_node, u, j and i_g are fixed linear functions of the states, and so are their polynomials over a step. R_VS = 0
// leaves v_node = v_pin. The gate current passes the pin's own balance twice and drops out:
//
//	C_pin·dv_pin/dt = i_B + i_clamp + j1 + j2 - I,   C_B·dv_BS/dt = i_B - (i_g1 while driven on)                   (23)
//
// Cells. Every capacitance is one of its own voltage, C_gd of v_ds - v_gs, so that charge is kept:
//
//	(C_gs + C_gd)·v_gs' - C_gd·v_ds' = i_g
//	(C_ds + C_gd)·v_ds' - C_gd·v_gs' = i_drain - i_channel + i_D,   i_drain = j1 (high side), -j2 (low side)       (24)
//	C_gd = C_rss(v_ds - v_gs),   C_ds = max(C_oss(v_ds) - C_rss(v_ds), 0.01·C_oss(v_ds))                           (25)
//	i_channel = i_sat·tanh(v_ds/(R_on·i_sat)),   i_sat = g_fs·(v_gs - V_th) above V_th, else 0                     (26)
//
// C_rss and C_oss by (1), level outside their points and below 0 V. An IGBT's channel carries nothing for v_ds < 0. A Diode is its C_oss and its
// reverse path.
//
// Reverse path, v = -v_ds - offset (of a HEMT that follows its gate + min(v_gs, V_th) - V_off), a = r + R_fr, and with a charge the scale I_E =
// I_S·(τ + T_M)/T_M, which keeps the static drop, without one I_E = I_S. Current and voltage of (13)'s law and of (12)'s network are
//
//	i_D + b = I_E·exp((v + R_fr·i_Lfr - a·i_D)/(n·V_T)),   b = I_E + q_M/T_M
//	i_D = (n·V_T/a)·W(e^y) - b,   y = (v + R_fr·i_Lfr + a·b)/(n·V_T) + ln(I_E·a/(n·V_T))                           (27)
//	dq_M/dt = i_D - q_M/τ,   L_fr·di_Lfr/dt = R_fr·(i_D - i_Lfr)                                                   (28)
//
// with Lambert's W in logarithmic form, exact for any v, a line of slope 1/a beyond the exponential. Where there is no resistance, a is 1e-6·n·V_T/I,
// which drops 1e-6·n·V_T at the load current I; n·V_T is at least 5 mV, with the drop at I kept. Bootstrap element and clamp are the same law
// without charge. An integrated switch is open but after the command that turns the low side on. Then it conducts towards the rail only: while
// the node still is at the bus the driver holds it off, and what flowed back through it after that within a window is below a window's share
// of its time constant R·C_B.
//
// Start: at rest but for the load current. One switch carries it, together with what element and clamp leave to it; in its v_ds everything else is
// explicit, and
//
//	i_branch(v_ds) + i_B(v_pin) + i_clamp(v_pin) = I,   v_pin = v_node + R_VS·(I - i_branch)                       (29)
//
// is monotone in it: one bracketed root. A channel that does not carry the current at any v_ds up to V_BUS is refused. q_M = τ·i_D, i_Lfr = i_D.
//
// States are i1, i2, both v_gs and v_ds, v_pin, v_BS less its start (its tolerance is that of the gain) and q_M, i_Lfr where there are any. Their
// tolerances follow them (Simulator.tolerate): relative beyond a size below which digits do not matter; v_ds of the high side counts from the
// nearer end, as near V_BUS its error is one of the undershoot; and what conducts is tolerated by its own knee.
//
// Window: it is over when, for one period 2π·sqrt((L1 + L2 + L_fr)·(C_oss(V_BUS) + C_pin)), the branch that carried the current has carried no
// more than 2 % of it and of what a ringing of 2 % of V_BUS drives through the loop, the switch that takes over has had at most 2 % of V_BUS beyond
// what it drops while on (on turn-off: since it first had no voltage, or the bootstrap element could take over a small load), and the node has
// stayed within a band 4 % of V_BUS wide. All of these are looked up in the dense output, so the end does not lie on a step. A tail that is slower
// than that, such as forward recovery, may go on; Dips.Lasting says so. At the limit the window ends as it is, not settled.
//
// Results. Extremes, passages and dips come from the places where the polynomials turn or cross; |dv/dt| from the rates of the equations at states
// of the dense output; charges are integrals of polynomials. Ringing is that of v_ds of the switch that blocks at the end, from its highest maximum e0, the
// minimum e1 and the maximum e2 after it:
//
//	f = 1/(t2 - t0),   damping = x/sqrt(π² + x²),   x = ln((e0 - e1)/(e2 - e1))                                    (30)
//
// Accuracy, held by tests: the 77 circuits of testdata/reference/event.py (SciPy's LSODA at 1e-9) are met to 1e-5 at a tolerance of 1e-7, and at
// DefaultTolerance peaks within 0.5 %, durations and slopes within 1 %, the energy balance within 0.5 %. Left out: the gate's current in the common
// source, coupling of the loops, gate loop inductance, temperature, and the load's ripple.
package transient
