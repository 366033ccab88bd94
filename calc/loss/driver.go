package loss

// Gate returns the power that a gate takes from its supply [W]: charge Q over the whole swing [C], swing V [V], frequency f [Hz].
// Q·V·f, half of it lost at each edge whatever the resistance; C·V²·f for a capacitance. [ucc27523], [lm5104, eq. 12]
func Gate(charge, swing, frequency float64) float64 { return charge * swing * frequency }

// DriverGate returns the driver's part of Gate [W], with its resistances on and off [ohm] and those between it and the gate in each
// direction, external and internal together [ohm]:
//
//	P = ½·Q·V·f·[R_off/(R_off + R_g,off) + R_on/(R_on + R_g,on)]
//
// R_g -> 0 leaves the whole of Q·V·f in the driver. Half the energy is lost per edge, in proportion to the resistances, which takes them
// as constant and the gate as their only load. [slusaq3f]; revision E lacks the ½.
func DriverGate(charge, swing, frequency, on, off, gateOn, gateOff float64) float64 {
	return 0.5 * Gate(charge, swing, frequency) * (share(on, gateOn) + share(off, gateOff))
}

// share returns r/(r + other) [1] for resistances [ohm]; 1 where there is none at all, the limit other -> 0.
func share(r, other float64) float64 {
	if other == 0 {
		return 1 + 0*r
	}
	return 1 / (1 + other/r)
}

// LevelShift returns the power of the level shift [W]: each period its charge Q_LS [C] comes down from V_B, which is V_BUS + V_BS above COM
// [V]. (V_BUS + V_BS)·Q_LS·f
func LevelShift(bus, floating, charge, frequency float64) float64 {
	return (bus + floating) * charge * frequency
}

// Leakage returns the power of a leakage current [A] across a voltage [V]: V_BUS·I_LK of the floating well, as if the node were always
// high; V_R·I_R of a diode while it blocks.
func Leakage(voltage, current float64) float64 { return voltage * current }

// Quiescent returns the power of the quiescent currents of both sides [W]: V_DD·I_QDD + V_BS·I_QBS from voltages [V] and currents [A].
func Quiescent(supply, supplyCurrent, floating, floatingCurrent float64) float64 {
	return supply*supplyCurrent + floating*floatingCurrent
}

// Junction returns the junction temperature [degC] at the ambient temperature [degC], thermal resistance [K/W] and power [W]:
// T_A + R_th·P. [2ed2109]
func Junction(ambient, resistance, power float64) float64 { return ambient + resistance*power }
