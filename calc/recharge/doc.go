// Package recharge is the exact law by which a bootstrap capacitor is refilled through a diode and a resistor, the map of
// one switching period that follows from it, and the periodic steady state of that map. Nothing here steps through time.
//
// # Element
//
// From the supply V_DD to the floating rail lie, in series, R = R_B + r_D + R_supply + R_VS and a diode. With the switch node
// at V_node the voltage across them is E - v, where E = V_DD - V_node [V] is the drive and v = V_BS [V]. The current i [A]
// counts positive into the capacitor:
//
//	E - v = i·R + n·V_T·ln(1 + i/I_S)                                                                 (1)
//
// which is increasing and concave in i. With s = i + I_S and l = ln s + ln(R/(n·V_T)) it is e^l + l = y,
//
//	y = (E - v + I_S·R)/(n·V_T) + ln I_S + ln(R/(n·V_T))                                              (2)
//
// Lambert's W in logarithmic form. I_S and s are carried as logarithms: 800 V across a blocking diode make ln s about
// -30000, and i tends to -I_S. An integrated switch is R alone and conducts both ways.
//
// # Law
//
// The capacitor C [F] takes the current of the element less the load I_q [A], and (1) gives dv = -(R + n·V_T/s) ds at constant E:
//
//	C·dv/dt = s - K,   K = I_q + I_S
//	dt = -C·(R + n·V_T/s)·ds/(s - K)
//	t = C·[R·A + (n·V_T/K)·(A + ln s1 - ln s0)],   A = ln((s0 - K)/(s1 - K))                          (3)
//
// s moves monotonically towards K, so A >= 0 in both directions, charging (s0 > K: v rises) and discharging or blocking
// (s0 < K: v falls). The terms of (3) cancel where K is small or the element blocks. Two identities remove that:
//
//	s1 = s0·e^-A + K·(1 - e^-A)                                                                       (4)
//	A + ln s1 - ln s0 = ln(1 + (K/s0)·(e^A - 1)) = u   and back   A = ln(1 + (s0/K)·(e^u - 1))        (5)
//
// so that (3) is, with all terms positive,
//
//	t/C = R·A + (n·V_T/K)·log1p((K/s0)·expm1(A))        solved for A when s0 >= K
//	t/C = (n·V_T/K)·u + R·log1p((s0/K)·expm1(u))        solved for u when s0 < K
//
// Both have the form a·x + b·log1p(p·expm1(x)) with p <= 1, convex and increasing in x, bracketed by the roots of each term
// alone. K -> 0 leaves (n·V_T/s0)·expm1(A) for the second term; s0 = K leaves A = u = t/(C·(R + n·V_T/K)), the
// exponential about equilibrium; R = 0 has the closed solution 1/s1 = e^-T/s0 + (1 - e^-T)/K with T = K·t/(C·n·V_T).
// From (3) and (4), because the flow is autonomous, the derivative is
//
//	dv1/dv0 = (s1 - K)/(s0 - K) = e^-A                                                                (6)
//
// Where s stays below 1e-16·K for the whole interval, v1 = v0 - K·t/C is used.
//
// # Conductance
//
// While the high side is on, R_GS loads the floating supply with G·v [A]. Blocked, the hold law is exact:
//
//	v(t) = (v0 + I_0/G)·e^(-G·t/C) - I_0/G                                                            (7)
//
// with I_0 = I_q + I_S. If the bus is so low that the element may conduct, there is no closed form with a diode. Then
// with the equilibrium v* (again Lambert's W) and w = ln|v - v*| the law is dw/dt = -k(v), where
//
//	k = [G + 1/(R + n·V_T/L(s, s*))]/C,   L(s, s*) = (s - s*)/(ln s - ln s*)                          (8)
//
// has no cancellation (L is the logarithmic mean), is monotone in v and lies between its values at v0 and at v*. So t = ∫dw/k
// is a quadrature of a smooth positive function, inverted by Newton's method to 1e-12 of t; v1 is exact to that.
//
// # Period and steady state
//
// Period.Map goes from just before one rising edge to just before the next. Every part of it is increasing in v, so it
// is increasing: intervals by (6); the rising edge v' = (C·v - Q - Q_rr)/(C + C_on) because Q_rr falls as v rises (see
// Period.recovered); the falling edge adds a constant. Without recovery each interval is also convex in v (the current is
// convex in v, hence its flow), and its slope is at most 1, so Map(v) - v is convex and decreasing and has one zero at
// most; it has none above 0 when Map(0) <= 0: the supply collapses. With recovery the slope of the edge is 1 + x, x = τ·(1 -
// e^(-t_on/τ))·g/C <= t_on·g/C with g = -di/dv at the end of conduction, while conduction itself contributed e^(-∫g·dt/C); as
// long as the element charges, g falls with time, the product is at most (1 + x)·e^-x <= 1, and the zero stays unique.
//
// Limits: constant C, drive and load within an interval; the diode is its static law apart from the recovery charge.
package recharge
