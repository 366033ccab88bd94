#!/usr/bin/env python3
"""Reference values for whole requests: writes stage.json beside this file, or to the path given.

Problem   A request of one stage and one operating point, every value without spread, 25 degC throughout. From its fields follow the
          capacitance, the loads, the law of the element, the node voltage over one period and the charges at the edges of the node;
          C dv/dt = i(V_DD - V_node - v) - I0 - G v in between, V_BS periodic.
Method    Each period is integrated by scipy.integrate.solve_ivp (LSODA, rtol 1e-11, atol 1e-13 V, analytic Jacobian), i by
          scipy.special.wrightomega. The steady state is the root of the change over one whole period, by brentq; it is then held
          against one period begun 0.1 uV above and one below, and in every fifth case against Radau. Fits of forward points by
          brentq, the charge of the output capacitances by scipy.integrate.quad. Nothing of the program under test is used.
Cases     seeded; each stores the request and, in SI units, V_BS lowest and highest, the time in which the element can recharge,
          the charge of one period, the same with R_GS at V_BS after the edge throughout (a bound), and whether the supply
          collapses (a period begun at 0 V does not end above it).
Left out  where the description of a stage does not say: the drop between reverse points and C_oss between its points (currents stand
          at points, C_oss has one); dead time of a stage with a diode below (0 s); recovery where the dead time conducts more than
          the low-side interval before it, which did conduct.

Run: /usr/bin/python3 stage.py [output]      (a few seconds)
"""
import json
import math
import pathlib
import sys

import numpy as np
import scipy
from scipy.integrate import quad, solve_ivp
from scipy.optimize import brentq
from scipy.special import wrightomega

SEED = 20250917
KT_Q = 1.380649e-23 * 298.15 / 1.602176634e-19
PREFIXES = [(1e-12, "p"), (1e-9, "n"), (1e-6, "u"), (1e-3, "m"), (1.0, ""), (1e3, "k"), (1e6, "M")]


# Requests: numbers become text with a unit, and only the text is read again.

def text(x, unit):
    if x == 0:
        return f"0 {unit}"
    factor, prefix = next(((f, p) for f, p in reversed(PREFIXES) if abs(x) >= f), PREFIXES[0])
    return f"{x / factor:.5g} {prefix}{unit}"


def q(x, unit):
    s = text(x, unit) if unit else f"{x:.5g}"
    return {"min": s, "typ": s, "max": s}


def read(s):
    """The number of a text in its SI unit."""
    if isinstance(s, dict):
        s = s["typ"]
    number, _, unit = s.partition(" ")
    if unit.endswith("%"):
        return float(number) / 100
    for factor, prefix in PREFIXES:
        if prefix and unit.startswith(prefix) and len(unit) > 1:
            return float(f"{number}e{round(math.log10(factor))}")
    return float(number)


def fitted(part):
    return part is not None and part.get("fit") != "NOT_FITTED"


# Laws.

class Element:
    """D = R i + nVT ln(1 + i/IS) with IS given by its logarithm, or a resistance alone."""

    def __init__(self, nvt, ln_is, r, switch=False):
        self.nvt, self.ln_is, self.r, self.switch = nvt, ln_is, r, switch
        self.i_s = 0.0 if switch else math.exp(ln_is)

    def drop(self, i):
        return self.r * i + self.nvt * np.logaddexp(0.0, math.log(i) - self.ln_is)

    def current(self, drive):
        """i and di/d(drive)."""
        if self.switch:
            return drive / self.r, 1 / self.r
        k = self.r / self.nvt
        s = float(wrightomega((drive + self.i_s * self.r) / self.nvt + self.ln_is + math.log(k))) / k
        return s - self.i_s, s / (s * self.r + self.nvt)


def fit(points, series=0.0):
    """The law through one forward point (n = 1.5) or exactly through two: n at most 2, the rest resistance."""
    pts = [(read(p["current"]), read(p["voltage"]) - series * read(p["current"])) for p in points]
    i2, u2 = pts[-1]

    def log_saturation(nvt, u):
        x = u / nvt
        return math.log(i2) - (x + math.log(-math.expm1(-x)))

    if len(pts) == 1:
        nvt = 1.5 * KT_Q
        return Element(nvt, log_saturation(nvt, u2), series)
    (i1, u1), cap = pts[0], 2 * KT_Q

    def miss(nvt, r):
        u = u2 - r * i2
        return nvt * np.logaddexp(0.0, math.log(i1) - log_saturation(nvt, u)) + r * i1 - u1

    if miss(cap, 0.0) <= 0:
        nvt, r = brentq(miss, 1e-7, cap, args=(0.0,), xtol=1e-18, rtol=1e-14), 0.0
    else:
        nvt, r = cap, brentq(lambda r: miss(cap, r), 0.0, (u2 - u1) / (i2 - i1), xtol=1e-18, rtol=1e-14)
    return Element(nvt, log_saturation(nvt, u2 - r * i2), series + r)


def output_charge(points, v):
    """Integral of C_oss from 0 to v, log C linear in log(1 + v / 1 V), constant outside."""
    x = [math.log1p(read(p["voltage"])) for p in points]
    y = [math.log(read(p["capacitance"])) for p in points]
    breaks = [b for b in (read(p["voltage"]) for p in points) if 0 < b < v]
    ends = [0.0] + breaks + [v]
    return sum(quad(lambda u: math.exp(np.interp(math.log1p(u), x, y)), a, b, epsabs=0, epsrel=1e-12)[0] for a, b in zip(ends, ends[1:]))


# One stage.

class Stage:
    def __init__(self, request):
        s = request["stage"]
        high, low, boot, driver, supply = s["highSide"], s["lowSide"], s["bootstrap"], s["driver"], s["gateSupply"]
        op = s["operatingPoints"][0]
        self.many_high, self.many_low = high.get("parallel", 1), low.get("parallel", 1)
        self.v_dd, self.bus = read(supply["voltage"]), read(op["busVoltage"])
        self.capacitance = capacitance(boot["capacitor"])
        self.loads(high, boot, driver)
        self.element_of(boot, supply, s["layout"])
        self.edges(high, boot, driver)
        self.intervals(high, low, driver, op, read(s["layout"]["shunt"]["resistance"]))

    def loads(self, high, boot, driver):
        self.load = read(driver["floatingQuiescentCurrent"]) + read(driver["offsetLeakage"])
        self.load += self.many_high * read(high["gateLeakage"])
        self.load += read(boot["diode"]["reverseLeakage"]) if "diode" in boot else 0.0
        self.load += read(boot["capacitor"]["leakage"]) + read(boot["otherLoad"])
        self.load += read(boot["clamp"]["leakage"]) if fitted(boot["clamp"]) else 0.0
        self.conductance = self.many_high / read(high["gatePullDown"]["resistance"]) if fitted(high["gatePullDown"]) else 0.0

    def element_of(self, boot, supply, layout):
        r = read(boot["resistor"]["resistance"]) + read(layout["nodeResistor"]["resistance"])
        if not fitted(supply["reservoir"]):
            r += read(supply["seriesResistance"])
        self.switch = boot["element"] == "INTEGRATED_SWITCH"
        if self.switch:
            self.element = Element(0.0, 0.0, r + read(boot["switchResistance"]), True)
            return
        e = fit(boot["diode"]["forwardPoints"], read(boot["diode"].get("seriesResistance", "0 ohm")))
        self.element = Element(e.nvt, e.ln_is, e.r + r)

    def edges(self, high, boot, driver):
        total, v_spec = read(high["gateCharge"]), read(high["gateChargeVoltage"])
        self.on_slope = (total - read(high["gateSourceCharge"]) - read(high["gateDrainCharge"])) / (v_spec - read(high["plateauVoltage"]))
        off = read(high["offBias"])
        shift = off if high.get("offBiasSource") == "SPLIT" else 0.0
        at_zero = total - self.on_slope * (v_spec - shift)  # Q_G(v) = at_zero + on_slope v
        if off:
            at_zero += read(high["inputCapacitance"]) * -off
        self.gate_at_zero, self.on_slope = self.many_high * at_zero, self.many_high * self.on_slope
        self.level_shift = read(driver["levelShiftCharge"])
        diode = {} if self.switch else boot["diode"]
        self.junction = read(diode["junctionCapacitance"]) * self.bus if diode else 0.0
        self.recovery_spec = read(diode["recoveryCharge"]) if diode else 0.0
        self.tau = self.recovery_spec / read(diode["recoveryTestCurrent"]) if self.recovery_spec else 0.0

    def intervals(self, high, low, driver, op, shunt):
        """The intervals after the on-time as (length, node voltage, low-side gate on), and where in that list the node rises."""
        load, ripple = read(op["loadCurrent"]), read(op["rippleCurrent"])
        peak, valley = load + ripple / 2, load - ripple / 2
        d, t, dead = read(op["fixedDuty"]["duty"]), 1 / read(op["switchingFrequency"]), read(op["deadTime"])
        least = read(driver["minimumPulse"]) + read(driver["edgeTime"])
        reverse = fit(low["reverse"]["forwardPoints"])
        deeper = read(low["reverse"]["gateVoltage"]) - read(low["offBias"]) if low["kind"] == "GAN_HEMT" else 0.0

        def free(i):  # node voltage while the low side freewheels
            return -(float(reverse.drop(i / self.many_low)) + deeper) - i * shunt

        def driven(i):  # node voltage while the low side is on
            if low["kind"] != "IGBT":
                return -i * (read(low["onResistance"]) / self.many_low + shunt)
            if i > 0:
                return free(i)
            x = [read(p["current"]) for p in low["channelPoints"]]
            y = [read(p["voltage"]) for p in low["channelPoints"]]
            return float(np.interp(-i / self.many_low, x, y)) - i * shunt

        self.on, self.pulses = d * t - dead, True
        slot = (1 - d) * t - dead
        if d == 0 or self.on < least:  # the low side stays on
            self.on, self.pulses, self.off = 0.0, False, [(t, driven(load), True)]
            return
        high_node = self.bus + 1.0
        driven_low = low["kind"] != "DIODE" and slot >= least
        fall = math.inf
        if peak > 0:
            charge = self.many_high * output_charge(high["outputCapacitance"], self.bus)
            charge += self.many_low * output_charge(low["outputCapacitance"], self.bus)
            fall = charge / peak
        plan = [(dead, free(peak) if peak > 0 else high_node, False)]
        if driven_low:
            plan.append((slot, driven(load), True))
        else:
            plan.append((slot, free(load) if load > 0 else high_node, False))
        plan.append((dead, free(valley) if valley > 0 else high_node, False))
        self.off = []
        for length, node, on in plan:
            falling = 0.0 if on or (self.off and self.off[-1][1] < self.bus) else min(fall, length)
            if falling > 0:
                self.off.append((falling, high_node, False))
                fall -= falling
            if length > falling:
                self.off.append((length - falling, node, on))

    def usable(self, node, on):
        return on if self.switch else node < self.bus

    def window(self):
        return sum(length for length, node, on in self.off if self.usable(node, on))

    def integrate(self, v0, length, node, on, high_on, method):
        """V_BS at the end, the highest within, the load charge, and for how long at the end the element has conducted."""
        if length <= 0:
            return v0, v0, 0.0, 0.0
        # At the bus the reverse current is the leakage of the data sheet, one of the loads; the law adds none to it.
        conducts, drive = self.usable(node, on), self.v_dd - node
        g = self.conductance if high_on else 0.0

        def rhs(_, y):
            i = self.element.current(drive - y[0])[0] if conducts else 0.0
            return [(i - self.load - g * y[0]) * length / self.capacitance, y[0]]

        def jac(_, y):
            slope = self.element.current(drive - y[0])[1] if conducts else 0.0
            return [[(-slope - g) * length / self.capacitance, 0.0], [1.0, 0.0]]

        def crossing(_, y):
            return drive - y[0]

        sol = solve_ivp(rhs, (0, 1), [v0, 0.0], method=method, rtol=1e-11, atol=1e-13, jac=jac, events=crossing)
        if not sol.success:
            raise RuntimeError(sol.message)
        end = float(sol.y[0, -1])
        forward = 0.0
        if conducts and end < drive:
            since = sol.t_events[0][-1] if len(sol.t_events[0]) and v0 >= drive else 0.0
            forward = length * (1 - since)
        return end, float(sol.y[0].max()), length * (self.load + g * float(sol.y[1, -1])), forward

    def period(self, v, method="LSODA"):
        """One period from just before the gate of the high side is charged: V_BS at its end, lowest, highest and the charge."""
        c, charge, lows, highs, self.excess = self.capacitance, 0.0, [v], [v], 0.0
        if self.pulses:
            after = (c * v - self.gate_at_zero - self.level_shift) / (c + self.on_slope)
            charge += self.gate_at_zero + self.on_slope * after + self.level_shift
            v, _, load, _ = self.integrate(after, self.on, self.bus, False, True, method)
            charge += load
            self.excess = self.conductance * after * self.on - (load - self.load * self.on)
            lows += [after, v]
            v += self.junction / c
        conducted, down = 0.0, False
        for n, (length, node, on) in enumerate(self.off):
            if self.pulses and down and node > self.bus:
                v, q = self.rise(v, last, conducted)
                charge, down = charge + q, False
                lows.append(v)
            entered = v
            v, top, load, forward = self.integrate(v, length, node, on, False, method)
            charge += load
            conducted = conducted + forward if forward >= length * (1 - 1e-12) else forward
            last, down = (node, on), node < self.bus
            lows += [entered, v]
            highs += [entered, v, top]
        if self.pulses and down:
            v, q = self.rise(v, last, conducted)
            charge += q
            lows.append(v)
        return v, min(lows), max(highs[1:] if self.pulses else highs), charge

    def rise(self, v, last, conducted):
        """The node rises: recovery and junction charge of the element leave."""
        q = 0.0
        node, on = last
        i = self.element.current(self.v_dd - node - v)[0] if on or not self.switch else 0.0
        if self.recovery_spec and i > 0:
            q = min(self.recovery_spec, self.tau * i * -math.expm1(-conducted / self.tau))
        return v - (q + self.junction) / self.capacitance, q + self.junction

    def steady(self, check):
        residual = lambda v: self.period(v)[0] - v
        out = {"window": self.window()}
        if residual(0.0) <= 0:
            return {**out, "collapses": True}
        top = self.v_dd - min(node for _, node, _ in self.off) + self.junction / self.capacitance
        new = brentq(residual, 0.0, top, xtol=1e-12, rtol=1e-14)
        if not (residual(new - 1e-7) > 0 > residual(new + 1e-7)):
            raise RuntimeError("not steady")
        if check:
            self.check = abs(self.period(new, "Radau")[0] - new)
        _, low, high, charge = self.period(new)
        return {**out, "collapses": False, "low": low, "high": high, "charge": charge, "bound": charge + self.excess}


def capacitance(c):
    if "effectiveCapacitance" in c:
        return read(c["effectiveCapacitance"])
    remaining = read(c["biasCurve"][0]["remaining"])
    aged = 1 - read(c["ageingPerDecade"]) * math.log10(float(c["serviceTime"].split()[0]))
    return read(c["capacitance"]) * remaining * aged


# Cases.

def points(*pairs):
    return [{"current": text(i, "A"), "voltage": q(v, "V")} for i, v in pairs]


def oss(rng):
    """One point: how C_oss runs between points is not what is checked here."""
    return [{"voltage": "0 V", "capacitance": q(rng.uniform(0.1e-9, 0.6e-9), "F")}]


def reverse_at(request, low, high):
    """Reverse points at the currents in use: the peak, and the valley where it differs and flows out of the node, else beside the peak.
    How the drop runs between points is not what is checked here."""
    stage = request["stage"]
    op, many = stage["operatingPoints"][0], stage["lowSide"].get("parallel", 1)
    load, ripple = read(op["loadCurrent"]), read(op["rippleCurrent"])
    peak, valley = (load + ripple / 2) / many, (load - ripple / 2) / many
    if peak <= 0:
        return request
    if stage["lowSide"]["kind"] == "DIODE":  # it carries the mean throughout
        valley = load / many
    other = valley if 0 < valley < peak else peak / 7
    return set_in(request, lowSide__reverse__forwardPoints=points((other, low), (peak, high)))


def base(rng, **kw):
    """A sourcing stage with a discrete silicon diode and small loads."""
    bus = kw.get("bus", float(rng.choice([48, 100, 400])))
    f = kw.get("f", rng.uniform(4e4, 2.5e5))
    current = round(kw.get("current", rng.uniform(3, 15)), 2)
    total = round(kw.get("total", rng.uniform(20e-9, 90e-9)) / 0.2e-9) * 0.2e-9  # its half prints exactly
    i_a, i_b = rng.uniform(5e-3, 3e-2), rng.uniform(0.5, 1.5)
    v_a = rng.uniform(0.55, 0.7)
    common = {"kind": "SI_MOSFET", "outputCapacitance": oss(rng), "offBias": q(0, "V")}
    stage = {
        "id": "leg",
        "gateSupply": {"voltage": q(kw.get("vdd", rng.uniform(11, 15)), "V"), "reservoir": {"fit": "NOT_FITTED"}, "seriesResistance": q(0, "ohm")},
        "driver": {"uvloFalling": q(4, "V"), "floatingQuiescentCurrent": q(rng.uniform(5e-5, 4e-4), "A"),
                   "offsetLeakage": q(rng.uniform(1e-6, 5e-5), "A"), "levelShiftCharge": q(rng.uniform(0.5e-9, 4e-9), "C"),
                   "floatingVoltageMax": "40 V", "minimumPulse": "1 ns", "edgeTime": q(1e-9, "s")},
        "highSide": {**common, "gateCharge": q(total, "C"), "gateSourceCharge": q(total / 2, "C"), "gateDrainCharge": q(total / 2, "C"),
                     "gateChargeVoltage": "10 V", "plateauVoltage": q(4, "V"), "driveVoltageMin": "5 V", "gateVoltageMax": "40 V",
                     "gateLeakage": q(0, "A"), "gatePullDown": {"fit": "NOT_FITTED"}},
        "lowSide": {**common, "onResistance": q(rng.uniform(5e-3, 2e-2), "ohm"),
                    "reverse": {"forwardPoints": points((1, 0.7), (10, 0.9))}},
        "bootstrap": {"element": "DISCRETE_DIODE",
                      "diode": {"forwardPoints": points((i_a, v_a), (i_b, v_a + rng.uniform(0.3, 0.6))), "reverseLeakage": q(rng.uniform(1e-7, 1e-5), "A"),
                                "recoveryCharge": q(0, "C"), "recoveryTestCurrent": "1 A", "junctionCapacitance": q(0, "F"), "reverseVoltageMax": "1200 V"},
                      "resistor": {"resistance": q(rng.uniform(1, 8), "ohm")},
                      "capacitor": {"effectiveCapacitance": q(total * rng.uniform(2, 15), "F"), "leakage": q(0, "A")},
                      "clamp": {"fit": "NOT_FITTED"}, "otherLoad": q(0, "A")},
        "layout": {"shunt": {"resistance": q(0, "ohm")}, "nodeResistor": {"resistance": q(0, "ohm")}},
        "operatingPoints": [{
            "name": "point", "busVoltage": q(bus, "V"), "loadCurrent": q(current, "A"), "rippleCurrent": q(round(kw.get("ripple", 0) / 0.02) * 0.02, "A"),
            "switchingFrequency": q(f, "Hz"), "deadTime": q(kw.get("dead", rng.uniform(60e-9, 300e-9)), "s"),
            "junctionTemperature": q(25, "degC"), "ambientTemperature": q(25, "degC"), "fixedDuty": {"duty": q(kw.get("d", rng.uniform(0.2, 0.8)), "")}}],
    }
    return {"stage": stage}


def set_in(request, **members):
    for path, value in members.items():
        node = request["stage"]
        *way, last = path.split("__")
        for key in way:
            node = node[int(key)] if isinstance(node, list) else node.setdefault(key, {})
        if value is None:
            del node[last]
        else:
            node[last] = value
    return request


def gan(rng, total, current, **kw):
    r = base(rng, bus=48.0, f=rng.uniform(5e5, 1e6), vdd=rng.uniform(4.8, 5.5), total=total, current=current, dead=rng.uniform(15e-9, 30e-9), **kw)
    return set_in(r, highSide__kind="GAN_HEMT", lowSide__kind="GAN_HEMT", highSide__gateChargeVoltage="5 V", highSide__plateauVoltage=q(2.2, "V"),
                  driver__uvloFalling=q(2, "V"), highSide__driveVoltageMin="3 V", lowSide__reverse__gateVoltage="0 V",
                  highSide__outputCapacitance=[{"voltage": "0 V", "capacitance": q(0.05e-9, "F")}],
                  lowSide__outputCapacitance=[{"voltage": "0 V", "capacitance": q(0.05e-9, "F")}])


def recovery(rng, r, spec):
    return set_in(r, bootstrap__diode__recoveryCharge=q(spec, "C"), bootstrap__diode__recoveryTestCurrent=text(rng.uniform(0.3, 1.0), "A"))


def cases():
    rng = np.random.default_rng(SEED)
    out = []

    def add(name, r, reverse=None, **members):
        set_in(r, **members)
        if reverse is None and r["stage"]["lowSide"]["kind"] == "GAN_HEMT":
            reverse = 1.6, 2.4
        out.append((name, reverse_at(r, *(reverse or (rng.uniform(0.65, 0.75), rng.uniform(0.85, 1.2))))))

    for n in range(4):
        add(f"sourcing {n}", base(rng))
    add("sourcing, one-point laws", base(rng), bootstrap__diode__forwardPoints=points((1, 0.93)), lowSide__reverse__forwardPoints=points((5, 0.85)))
    add("sourcing, Schottky diode", base(rng), bootstrap__diode__forwardPoints=points((0.1, 0.32), (1, 0.45)))
    add("sourcing, fixed drop", base(rng), bootstrap__diode__forwardPoints=points((1e-3, 0.3999), (100, 0.4001)))
    add("sourcing, series resistance beside the points", base(rng), bootstrap__diode__seriesResistance=q(0.15, "ohm"))
    add("sourcing, parallel devices and shunt", base(rng, current=24.0), highSide__parallel=2, lowSide__parallel=3, layout__shunt__resistance=q(5e-3, "ohm"))
    for n in range(2):
        add(f"ripple {n}", base(rng, current=8.0, ripple=rng.uniform(4, 12)))
    for n in range(3):
        add(f"GaN pumped {n}", gan(rng, rng.uniform(4e-9, 8e-9), 10.0), bootstrap__resistor__resistance=q(rng.uniform(2, 6), "ohm"))
    add("GaN off bias of the low side", gan(rng, 6e-9, 10.0), lowSide__offBias=q(-3, "V"), lowSide__offBiasSource="SEPARATE")
    add("GaN points at negative gate", gan(rng, 6e-9, 10.0), reverse=(4.6, 5.3), lowSide__reverse__gateVoltage="-3 V")
    add("GaN parallel pumped", gan(rng, 6e-9, 20.0), highSide__parallel=2, lowSide__parallel=2)
    add("GaN pumped, recovery", recovery(rng, gan(rng, 6e-9, 10.0), 12e-9))
    for n in range(2):
        add(f"sinking {n}", base(rng, current=-rng.uniform(3, 15)))
    add("sinking, ripple", base(rng, current=-6.0, ripple=5.0))
    add("sinking on average, sourcing at its peak", base(rng, current=-1.0, ripple=8.0, bus=48.0, dead=3e-7))
    add("sinking, recovery", recovery(rng, base(rng, current=-6.0, d=0.85, f=2e5), 25e-9), bootstrap__resistor__resistance=q(9, "ohm"))
    quiet = dict(driver__floatingQuiescentCurrent=q(1e-5, "A"), driver__offsetLeakage=q(1e-6, "A"), bootstrap__diode__reverseLeakage=q(1e-7, "A"))
    add("sinking, recovery and junction", recovery(rng, base(rng, current=-6.0, d=0.85, f=2e5), 25e-9),
        bootstrap__diode__junctionCapacitance=q(12e-12, "F"), bootstrap__resistor__resistance=q(9, "ohm"), **quiet)
    for n in range(2):
        add(f"light load, second dead time at the bus {n}", base(rng, current=rng.uniform(0.5, 1), ripple=rng.uniform(4, 8), bus=48.0, dead=2.5e-7))
    add("light load, recovery, second dead time at the bus", recovery(rng, base(rng, current=1.0, ripple=6.0, bus=48.0, d=0.9, f=2e5, dead=2e-7), 30e-9))
    add("light load, part of the dead time falling", base(rng, current=0.8, ripple=0.4, bus=100.0, dead=3e-7))
    add("light load, never commutates", base(rng, current=0.05, bus=400.0, dead=1e-7))
    add("light load, parallel output capacitances", base(rng, current=3.0, bus=48.0, dead=3e-7), highSide__parallel=2, lowSide__parallel=2)
    integrated = dict(bootstrap__element="INTEGRATED_DIODE", bootstrap__diode__forwardPoints=points((1e-4, 0.6), (0.1, 1.6)))
    add("integrated diode", base(rng), **integrated)
    add("integrated diode, sinking", base(rng, current=-5.0), **integrated)
    add("integrated diode, recovery", recovery(rng, base(rng, d=0.85, f=2e5), 4e-9), **integrated)
    switch = dict(bootstrap__element="INTEGRATED_SWITCH", bootstrap__diode=None, bootstrap__switchResistance=q(40, "ohm"))
    add("integrated switch", base(rng), **switch)
    add("integrated switch, sinking", base(rng, current=-8.0), **switch)
    add("integrated switch, GaN", gan(rng, 6e-9, 10.0, d=0.6), **{**switch, "bootstrap__switchResistance": q(12, "ohm")})
    vanished = dict(driver__minimumPulse="40 ns", driver__edgeTime=q(12e-9, "s"))
    edge = dict(d=0.95, f=1e6, dead=15e-9, bus=48.0, total=20e-9)
    small = [{"voltage": "0 V", "capacitance": q(0.1e-9, "F")}]
    add("vanished pulse, sourcing", base(rng, current=10.0, **edge), highSide__outputCapacitance=small, lowSide__outputCapacitance=small, **vanished)
    add("vanished pulse, falling into the pulse", base(rng, current=2.0, **edge), highSide__outputCapacitance=[{"voltage": "0 V", "capacitance": q(0.4e-9, "F")}],
        lowSide__outputCapacitance=[{"voltage": "0 V", "capacitance": q(0.4e-9, "F")}], bootstrap__resistor__resistance=q(0.2, "ohm"), **vanished)
    add("vanished pulse, sinking", base(rng, current=-10.0, **edge), **vanished)
    add("vanished pulse, integrated switch", base(rng, current=10.0, **edge), **vanished, **switch)
    add("pulse just not vanished", base(rng, current=10.0, d=0.93, **{k: v for k, v in edge.items() if k != "d"}), driver__minimumPulse="40 ns", driver__edgeTime=q(12e-9, "s"))
    add("vanished high-side pulse", base(rng, current=5.0, d=0.06, f=1e6, dead=20e-9), driver__minimumPulse="40 ns", driver__edgeTime=q(12e-9, "s"))
    add("no duty", base(rng, current=5.0, d=0.0))
    diode_low = dict(lowSide__kind="DIODE", operatingPoints__0__deadTime=q(0, "s"), lowSide__onResistance=None, lowSide__offBias=None)
    add("diode below", base(rng), **diode_low)
    add("diode below, ripple", base(rng, current=5.0, ripple=6.0), **diode_low)
    add("diode below, slow fall", base(rng, current=0.5, bus=100.0, f=5e4, d=0.5), **diode_low)
    add("diode below, sinking", base(rng, current=-5.0), **diode_low)
    add("gate resistor", base(rng, f=2e4), highSide__gatePullDown={"resistance": q(1e4, "ohm")})
    add("gate resistor, parallel devices", base(rng, f=1e4, d=0.85), highSide__gatePullDown={"resistance": q(4.7e3, "ohm")}, highSide__parallel=2)
    bias = dict(highSide__offBias=q(-3, "V"), highSide__inputCapacitance=q(1.8e-9, "F"), highSide__inputCapacitanceVoltage="25 V")
    slope = dict(highSide__gateCharge=q(60e-9, "C"), highSide__gateSourceCharge=q(14e-9, "C"), highSide__gateDrainCharge=q(16e-9, "C"), highSide__plateauVoltage=q(4.6, "V"))
    add("off bias of its own", base(rng, total=60e-9), highSide__offBiasSource="SEPARATE", **bias)
    add("off bias split", base(rng, total=60e-9), highSide__offBiasSource="SPLIT", **bias)
    add("off bias of its own, slope", base(rng, total=60e-9), highSide__offBiasSource="SEPARATE", **bias, **slope)
    add("off bias split, slope", base(rng, total=60e-9), highSide__offBiasSource="SPLIT", **bias, **slope)
    add("off bias split, slope, parallel devices", base(rng, total=60e-9), highSide__offBiasSource="SPLIT", highSide__parallel=2, **bias, **slope)
    for n in range(2):
        add(f"gate charge over drive {n}", base(rng, total=60e-9), **slope)
    add("junction charge", base(rng, bus=400.0), bootstrap__diode__junctionCapacitance=q(15e-12, "F"))
    add("recovery, resistor limits", recovery(rng, base(rng, d=0.9, f=2e5, dead=0.0), 30e-9), bootstrap__resistor__resistance=q(12, "ohm"))
    add("recovery, all of it", recovery(rng, base(rng, d=0.97, f=2e5, total=60e-9, dead=2.5e-8), 2e-9))
    add("recovery, slow diode", recovery(rng, base(rng, d=0.95, f=3e5, total=20e-9, dead=0.0), 200e-9), bootstrap__resistor__resistance=q(4, "ohm"))
    add("resistor in the V_S line and of the supply", base(rng, d=0.9), layout__nodeResistor__resistance=q(2.2, "ohm"), gateSupply__seriesResistance=q(3.3, "ohm"))
    add("reservoir behind the supply's resistance", base(rng, d=0.9), gateSupply__seriesResistance=q(33, "ohm"),
        gateSupply__reservoir={"effectiveCapacitance": q(22e-6, "F"), "voltageRating": "50 V"})
    channel = [{"current": text(i, "A"), "voltage": q(v, "V")} for i, v in ((5, 1.1), (20, 1.7), (40, 2.3))]
    igbt = dict(highSide__kind="IGBT", lowSide__kind="IGBT", lowSide__onResistance=None, lowSide__channelPoints=channel)
    add("IGBT, sinking", base(rng, current=-20.0, bus=400.0, f=1.6e4), **igbt)
    add("IGBT, sinking between its points, parallel", base(rng, current=-60.0, bus=400.0, f=1.6e4), lowSide__parallel=2, **igbt)
    add("IGBT, sourcing", base(rng, current=20.0, bus=400.0, f=1.6e4), **igbt)
    loads = dict(highSide__gateLeakage=q(1e-5, "A"), highSide__parallel=3, bootstrap__capacitor__leakage=q(2e-5, "A"), bootstrap__otherLoad=q(1e-3, "A"),
                 bootstrap__clamp={"fit": "FITTED", "voltage": q(35, "V"), "leakage": q(5e-5, "A"), "power": "1 W"})
    add("every load", base(rng, f=1e4), **loads)
    add("window far below R·C", base(rng, d=0.97, f=1.5e5, total=25e-9, dead=3e-8), bootstrap__resistor__resistance=q(30, "ohm"))
    ceramic = {"capacitance": q(1e-6, "F"), "dielectric": "X7R", "voltageRating": "50 V", "caseSize": "1206", "serviceTime": "10000 h", "leakage": q(0, "A"),
               "biasCurve": [{"voltage": "0 V", "remaining": "80 %"}, {"voltage": "50 V", "remaining": "80 %"}]}
    add("ceramic of class 2", base(rng, f=2e4), bootstrap__capacitor={**ceramic, "ageingPerDecade": "0 %"})
    add("ceramic of class 2, aged", base(rng, f=2e4), bootstrap__capacitor={**ceramic, "ageingPerDecade": "2.5 %"})
    return out


def main():
    results, worst = [], 0.0
    for n, (name, request) in enumerate(cases()):
        stage = Stage(request)
        expected = stage.steady(n % 5 == 0)
        worst = max(worst, getattr(stage, "check", 0.0))
        results.append({"name": name, "request": request, "expected": expected})
    doc = {"script": "stage.py", "seed": SEED, "python": sys.version.split()[0], "scipy": scipy.__version__, "numpy": np.__version__,
           "method": "solve_ivp LSODA rtol 1e-11, brentq over the period", "radau_difference_per_period": worst, "cases": results}
    path = pathlib.Path(sys.argv[1]) if len(sys.argv) > 1 else pathlib.Path(__file__).with_suffix(".json")
    path.write_text(json.dumps(doc, indent=1, ensure_ascii=False) + "\n")


if __name__ == "__main__":
    main()
