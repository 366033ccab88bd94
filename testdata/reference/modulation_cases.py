"""The cases of modulation.py, every number in SI units, angles in degrees; its docstring says what they mean.

Parts are typical of their kind: a three-phase drive with IGBTs, a module with the bootstrap element inside, a low-voltage inverter, gallium
nitride that pumps, silicon carbide. The numbers of periods have no factor in common with 6 where the modulation has sectors (6 in six-step
operation), so that no sample but theta = 0 falls on a sector's edge.
"""
KT_Q_25 = 1.380649e-23 * 298.15 / 1.602176634e-19


def diode(resistance, volts, n):
    """volts at 1 A across the junction."""
    return {"slope": n * KT_Q_25, "log_saturation": -volts / (n * KT_Q_25), "resistance": resistance, "switch": False}


def switch(resistance):
    return {"slope": 0.0, "log_saturation": 0.0, "resistance": resistance, "switch": True}


DRIVE = {  # 400 V motor drive with IGBTs
    "supply": 15.0, "bus": 565.0, "element": diode(15.0, 0.85, 1.8), "capacitance": 2.2e-6, "load": 350e-6, "conductance": 0.0,
    "charge": 90e-9, "charge_per_volt": 0.0, "junction_charge": 0.0, "recovery_spec": 0.0, "recovery_tau": 0.0,
    "switching_frequency": 10e3, "dead_time": 1e-6, "shortest_pulse": 0.4e-6, "low_side": "IGBT", "on_resistance": 0.0,
    "saturation_level": 0.8, "saturation_resistance": 0.06, "reverse_level": 0.9, "reverse_resistance": 0.05, "output_charge": 120e-9,
    "current": 12.0,
}
MODULE = {**DRIVE, "bus": 310.0, "element": switch(120.0), "capacitance": 4.7e-6, "load": 200e-6, "charge": 40e-9, "output_charge": 60e-9,
          "current": 6.0, "switching_frequency": 8e3}  # integrated switch
LOW_VOLTAGE = {
    **DRIVE, "supply": 12.0, "bus": 48.0, "element": diode(2.7, 0.38, 1.08), "capacitance": 220e-9, "load": 150e-6, "charge": 38e-9,
    "charge_per_volt": 3.2e-9, "switching_frequency": 40e3, "dead_time": 250e-9, "shortest_pulse": 150e-9, "low_side": "MOSFET",
    "on_resistance": 4e-3, "saturation_level": 0.0, "saturation_resistance": 0.0, "reverse_level": 0.75, "reverse_resistance": 2e-3,
    "output_charge": 160e-9, "current": 40.0,
}
GAN = {**LOW_VOLTAGE, "supply": 5.25, "element": diode(2.7, 0.40, 1.1), "capacitance": 100e-9, "charge": 6e-9, "charge_per_volt": 0.0,
       "load": 120e-6, "switching_frequency": 500e3, "dead_time": 20e-9, "shortest_pulse": 15e-9, "on_resistance": 7e-3, "reverse_level": 2.0,
       "reverse_resistance": 0.015, "output_charge": 40e-9, "current": 15.0}
SIC = {**LOW_VOLTAGE, "supply": 18.0, "bus": 800.0, "element": diode(4.7, 0.9, 1.7), "capacitance": 1e-6, "charge": 110e-9, "load": 500e-6,
       "switching_frequency": 32e3, "dead_time": 300e-9, "shortest_pulse": 100e-9, "on_resistance": 30e-3, "reverse_level": 3.2,
       "reverse_resistance": 0.03, "output_charge": 300e-9, "current": 25.0}
SHORT = {**DRIVE, "switching_frequency": 20e3, "shortest_pulse": 1.3e-6}
RECOVERY = {"junction_charge": 0.8e-9, "recovery_spec": 30e-9, "recovery_tau": 60e-9}
STANDSTILL = {"supply": 12.25, "element": diode(10.0, 0.7, 1.7), "capacitance": 2.8e-6, "load": 180e-6, "charge": 20e-9}


def cases():
    out = []

    def sine(name, base, zero, index, phi, n, **more):
        p = {"name": name, "kind": "sinusoidal", **base, "zero_sequence": zero, "index": index, "displacement": phi, "periods": n, **more}
        p["fundamental_frequency"] = p["switching_frequency"] / p["periods"]
        out.append(p)

    def step(name, base, chopping, duty, n, **more):
        p = {"name": name, "kind": "sixStep", **base, "chopping": chopping, "duty": duty, "periods": n, **more}
        p["electrical_frequency"] = p["switching_frequency"] / p["periods"]
        out.append(p)

    def bursts(name, base, duty, active, idle_time, idle_node, rising, **more):
        out.append({"name": name, "kind": "burst", **base, "duty": duty, "active": active, "idle_time": idle_time, "idle_node": idle_node,
                    "uvlo_rising": rising, **more})

    sine("motoring", DRIVE, "NONE", 0.85, 31.7, 199)
    sine("regenerating", DRIVE, "NONE", 0.85, 151.3, 199)
    sine("third harmonic", DRIVE, "THIRD_HARMONIC", 1.08, 31.7, 199)
    sine("min-max", DRIVE, "MIN_MAX", 1.1, 31.7, 199)
    sine("min-max, regenerating", DRIVE, "MIN_MAX", 1.1, -148.3, 199)
    sine("clamp 60", DRIVE, "CLAMP_60", 0.9, 31.7, 199)
    sine("clamp 60, regenerating", DRIVE, "CLAMP_60", 0.9, 151.3, 199)
    sine("clamp 120 high", DRIVE, "CLAMP_120_HIGH", 0.7, 31.7, 199)
    sine("clamp 120 high, regenerating", DRIVE, "CLAMP_120_HIGH", 0.7, 151.3, 199)
    sine("clamp 120 low", DRIVE, "CLAMP_120_LOW", 0.7, 31.7, 199)
    sine("clamp 120 low, small index", DRIVE, "CLAMP_120_LOW", 0.06, 11.3, 505)
    sine("over-modulated", DRIVE, "NONE", 1.3, 31.7, 121)
    sine("over-modulated, third harmonic", DRIVE, "THIRD_HARMONIC", 1.35, 31.7, 121)
    sine("over-modulated, min-max, regenerating", DRIVE, "MIN_MAX", 1.4, 151.3, 121)
    sine("over-modulated, clamp 60", DRIVE, "CLAMP_60", 1.3, 31.7, 121)
    sine("over-modulated to six steps", DRIVE, "NONE", 12.0, 31.7, 121)
    sine("short pulses vanish, motoring", SHORT, "NONE", 0.97, 25.4, 401)
    sine("short pulses vanish, regenerating", SHORT, "NONE", 0.97, 154.6, 401)
    sine("short pulses vanish, min-max", SHORT, "MIN_MAX", 1.14, 40.3, 251)
    sine("short pulses vanish, integrated switch", {**MODULE, "shortest_pulse": 3e-6}, "NONE", 0.96, 25.4, 251)
    sine("short pulses vanish, 1 MHz, regenerating", {**GAN, "switching_frequency": 1e6, "shortest_pulse": 52e-9}, "MIN_MAX", 1.12, 155.3, 251)
    sine("standstill, sinusoidal", DRIVE, "NONE", 0.04, 5.3, 1009)
    sine("near standstill, regenerating", DRIVE, "NONE", 0.1, 171.3, 4001)
    sine("clamped at standstill", {**DRIVE, **STANDSTILL}, "CLAMP_60", 0.05, 10.3, 505, switching_frequency=1010.0)
    sine("clamped at ten times the frequency", {**DRIVE, **STANDSTILL}, "CLAMP_60", 0.05, 10.3, 505, switching_frequency=10100.0)
    sine("clamped high until nothing is left", {**DRIVE, **STANDSTILL}, "CLAMP_120_HIGH", 0.05, 10.3, 505, switching_frequency=505.0)
    sine("high fundamental", LOW_VOLTAGE, "MIN_MAX", 1.05, 28.3, 25)
    sine("high fundamental, clamp 60", LOW_VOLTAGE, "CLAMP_60", 1.0, 28.3, 35)
    sine("low voltage, motoring", LOW_VOLTAGE, "MIN_MAX", 0.8, 20.3, 401)
    sine("low voltage, regenerating", LOW_VOLTAGE, "MIN_MAX", 0.8, 160.9, 401)
    sine("peak detector", GAN, "MIN_MAX", 0.9, 25.3, 1009)
    sine("peak detector, regenerating", GAN, "THIRD_HARMONIC", 0.9, -155.3, 505)
    sine("silicon carbide", SIC, "MIN_MAX", 1.12, 15.1, 641)
    sine("silicon carbide, clamp 60, recovery", {**SIC, **RECOVERY}, "CLAMP_60", 1.0, 15.1, 641)
    sine("integrated switch, motoring", MODULE, "NONE", 0.9, 31.7, 161)
    sine("integrated switch, regenerating", MODULE, "NONE", 0.9, 151.3, 161)
    sine("integrated switch, clamp 120 high", MODULE, "CLAMP_120_HIGH", 0.6, 31.7, 401)
    sine("integrated switch, min-max, junction charge", {**MODULE, "junction_charge": 3e-9}, "MIN_MAX", 1.0, 75.3, 161)
    sine("integrated diode", {**MODULE, "element": diode(180.0, 1.1, 2.0)}, "THIRD_HARMONIC", 1.0, 31.7, 161)
    sine("integrated diode, clamp 60", {**MODULE, "element": diode(180.0, 1.1, 2.0)}, "CLAMP_60", 0.8, 31.7, 161)
    sine("pull-down, min-max", {**DRIVE, "conductance": 1e-4}, "MIN_MAX", 1.1, 31.7, 199)
    sine("pull-down, clamp 60", {**DRIVE, "conductance": 1e-4}, "CLAMP_60", 0.9, 31.7, 401)
    sine("pull-down, integrated switch", {**MODULE, "conductance": 5e-5}, "CLAMP_120_HIGH", 0.8, 120.7, 161)
    sine("recovery, motoring", {**DRIVE, **RECOVERY}, "NONE", 0.9, 31.7, 199)
    sine("recovery, regenerating", {**DRIVE, **RECOVERY}, "NONE", 0.9, 151.3, 199)
    sine("recovery, low voltage", {**LOW_VOLTAGE, "junction_charge": 0.4e-9, "recovery_spec": 12e-9, "recovery_tau": 40e-9}, "MIN_MAX", 1.1,
         35.7, 251)
    hurried = {**LOW_VOLTAGE, "element": diode(15.0, 0.85, 1.8), "switching_frequency": 150e3, "conductance": 1e-4}
    sine("recovery, incomplete recharge, motoring", {**hurried, **RECOVERY}, "MIN_MAX", 0.9, 25.3, 301)
    sine("recovery, incomplete recharge, regenerating", {**hurried, **RECOVERY}, "MIN_MAX", 0.9, 155.3, 301)
    sine("recovery at its limit", {**hurried, **RECOVERY, "recovery_spec": 6e-9}, "CLAMP_60", 0.9, 25.3, 301)
    sine("light load", {**LOW_VOLTAGE, "current": 1.6}, "NONE", 0.9, 31.7, 251)
    sine("no load", {**LOW_VOLTAGE, "current": 0.3}, "NONE", 0.9, 80.3, 251)
    sine("reactive, lagging", DRIVE, "NONE", 0.9, 89.3, 151)
    sine("reactive, leading", DRIVE, "THIRD_HARMONIC", 1.0, -89.3, 151)
    sine("long dead time", {**DRIVE, "dead_time": 4e-6, "switching_frequency": 16e3}, "NONE", 0.8, 31.7, 199)
    sine("no dead time, every pulse passes", {**DRIVE, "dead_time": 0.0, "shortest_pulse": 0.0}, "NONE", 0.9, 31.7, 151)
    sine("larger resistor", {**DRIVE, "element": diode(220.0, 0.85, 1.8)}, "NONE", 0.85, 31.7, 199)
    sine("larger resistor, ten times the capacitance", {**DRIVE, "element": diode(220.0, 0.85, 1.8), "capacitance": 22e-6}, "NONE", 0.85, 31.7, 199)

    step("six-step, high side chopped", LOW_VOLTAGE, "HIGH_SIDE", 0.62, 240, current=20.0)
    step("six-step, low side chopped", LOW_VOLTAGE, "LOW_SIDE", 0.62, 240, current=20.0)
    step("six-step, both chopped", {**LOW_VOLTAGE, **RECOVERY}, "BOTH", 0.62, 240, current=20.0)
    step("six-step, high side chopped, integrated switch", MODULE, "HIGH_SIDE", 0.8, 252)
    step("six-step, low side chopped, pull-down", {**MODULE, "conductance": 1e-4}, "LOW_SIDE", 0.8, 252)
    step("six-step, both chopped, regenerating", LOW_VOLTAGE, "BOTH", 0.4, 120, current=-20.0)
    step("six-step, high side chopped, near full duty", {**LOW_VOLTAGE, **RECOVERY}, "HIGH_SIDE", 0.985, 600, current=20.0)
    step("six-step, low side chopped, slow", {**DRIVE, **STANDSTILL}, "LOW_SIDE", 0.5, 600, switching_frequency=5e3)
    step("six-step, short low sector", LOW_VOLTAGE, "LOW_SIDE", 0.03, 48, current=20.0, element=diode(47.0, 0.7, 1.7))

    bursts("burst, output discharged", LOW_VOLTAGE, 0.5, 40, 20e-3, 0.0, 8.7, current=5.0)
    bursts("burst, node at half the bus", LOW_VOLTAGE, 0.5, 40, 2e-3, 24.0, 8.7, current=5.0)
    bursts("burst, node at half the bus, too long", LOW_VOLTAGE, 0.5, 40, 8e-3, 24.0, 8.7, current=5.0)
    bursts("burst, pre-biased", LOW_VOLTAGE, 0.3, 30, 20e-3, 5.0, 8.7, current=5.0)
    bursts("burst, pre-biased, low enough", {**LOW_VOLTAGE, **RECOVERY}, 0.15, 30, 20e-3, 1.8, 8.7, current=5.0)
    bursts("burst, integrated switch", MODULE, 0.5, 24, 40e-3, 0.0, 11.7)
    bursts("burst, sinking", DRIVE, 0.6, 24, 10e-3, 282.5, 12.3, current=-3.0)

    def first(name, base, target, at, **more):
        out.append({"name": name, "kind": "precharge", **{key: base[key] for key in ("supply", "element", "capacitance", "load")}, "node": 0.0,
                    "initial": 0.0, "target": target, "at": at, **more})

    first("pre-charge", DRIVE, 13.0, 50e-6)
    first("pre-charge, integrated switch", MODULE, 13.0, 500e-6)
    first("pre-charge, integrated diode", {**MODULE, "element": diode(180.0, 1.1, 2.0)}, 12.5, 500e-6)
    first("pre-charge, charged in part", LOW_VOLTAGE, 11.3, 1e-6, initial=3.0)
    first("pre-charge, pre-biased: never", LOW_VOLTAGE, 9.0, 5e-6, node=5.0)
    first("pre-charge, pulsed", DRIVE, 12.5, 430e-6, width=20e-6, period=100e-6)
    first("pre-charge, many pulses", MODULE, 13.0, 7e-3, width=10e-6, period=125e-6)
    first("pre-charge, pulsed: never", {**MODULE, "load": 2e-3}, 14.0, 4e-3, width=5e-6, period=200e-6)

    def held(name, c, load, g, initial, duration, lockout):
        out.append({"name": name, "kind": "heldOn", "capacitance": c, "load": load, "conductance": g, "initial": initial, "duration": duration,
                    "lockout": lockout})

    held("held on, pull-down", 6e-6, 150e-6, 1e-4, 11.0, 10.64e-3, 8.9)
    held("held on", 1e-6, 200e-6, 0.0, 12.0, 5e-3, 9.0)
    held("held on, stall", 47e-6, 400e-6, 0.0, 14.2, 0.5, 11.5)
    held("held on, small capacitor", 220e-9, 90e-6, 4.7e-5, 11.4, 1e-3, 8.2)
    return out
