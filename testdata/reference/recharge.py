#!/usr/bin/env python3
"""Reference values for the recharge law and its periodic steady state: writes recharge.json beside this file.

Problem   C dv/dt = i(E - v) - I - G v within an interval of constant E, I, G; jumps of charge at the edges of the node;
          i from E - v = R i + nVT ln(1 + i/IS) (or i = (E - v)/R for a switch); the steady state is v = F(v) over one period.
Method    scipy.integrate.solve_ivp, LSODA, rtol 1e-11, atol 1e-13 V, in scaled time, with the analytic Jacobian; a sample of cases
          again by Radau. i by scipy.special.wrightomega. The steady state is the root of F(v) - v by scipy.optimize.brentq.
          Nothing of the closed-form law under test is used.
Cases     seeded; each stores every input in SI units, V_BS before and after the rising edge, lowest and highest, Q_rr and
          whether the supply collapses (F(0) <= 0), then with the periods to a lockout level.

Run: /usr/bin/python3 recharge.py      (a few seconds)
"""
import json
import math
import pathlib
import sys

import numpy as np
import scipy
from scipy.integrate import solve_ivp
from scipy.optimize import brentq
from scipy.special import wrightomega

SEED = 20240611
KT_Q_25 = 1.380649e-23 * 298.15 / 1.602176634e-19


class Element:
    def __init__(self, d):
        self.r, self.switch = d["resistance"], d["switch"]
        self.nvt, self.ln_is = d["slope"], d["log_saturation"]
        if not self.switch:
            self.i_s = math.exp(self.ln_is)

    def current(self, drive):
        """i and di/d(drive)."""
        if self.switch:
            return drive / self.r, 1 / self.r
        k = self.r / self.nvt
        s = float(wrightomega((drive + self.i_s * self.r) / self.nvt + self.ln_is + math.log(k))) / k
        return s - self.i_s, s / (s * self.r + self.nvt)


def integrate(element, c, v0, iv, method="LSODA"):
    t = iv["duration"]
    if t <= 0:
        return v0
    drive, load, g = iv["drive"], iv["load"], iv["conductance"]

    def rhs(_, y):
        i = element.current(drive - y[0])[0] if iv["conducts"] else 0.0
        return [(i - load - g * y[0]) * t / c]

    def jac(_, y):
        d = element.current(drive - y[0])[1] if iv["conducts"] else 0.0
        return [[(-d - g) * t / c]]

    sol = solve_ivp(rhs, (0, 1), [v0], method=method, rtol=1e-11, atol=1e-13, jac=jac)
    if not sol.success:
        raise RuntimeError(sol.message)
    return float(sol.y[0, -1])


def recovery(p, element, v):
    """min(Q_spec, stored charge): intervals backwards from the edge, each with its current at v but no more than the later ones'."""
    tau = p["recovery_tau"]
    if p["recovery_spec"] <= 0 or element.switch:
        return 0.0
    q, least, later = 0.0, math.inf, 0.0
    for iv in reversed(p["off"]):
        if iv["duration"] <= 0:
            continue
        if not iv["conducts"] or v >= iv["drive"]:
            break
        least = min(least, element.current(iv["drive"] - v)[0])
        q += tau * least * (math.exp(-later / tau) - math.exp(-(later + iv["duration"]) / tau))
        later += iv["duration"]
    return min(q, p["recovery_spec"])


def period(p, element, v, method="LSODA"):
    c = p["capacitance"]
    q_rr = recovery(p, element, v)
    after = (c * v - p["charge"] - q_rr) / (c + p["charge_per_volt"])
    points = [after, integrate(element, c, after, p["on"], method)]
    points.append(points[-1] + p["return"] / c)
    for iv in p["off"]:
        points.append(integrate(element, c, points[-1], iv, method))
    return points, q_rr


def count(p, element):
    """Periods from p["start"], just before a rising edge, to the first in which V_BS is below p["lockout"]."""
    v = p["start"]
    for n in range(1, 10000):
        points, _ = period(p, element, v)
        if min(points) < p["lockout"]:
            return n
        v = points[-1]
    raise RuntimeError("no lockout")


def steady(p):
    element = Element(p["element"])
    drives = [iv["drive"] for iv in p["off"] + [p["on"]] if iv["conducts"] and iv["duration"] > 0]
    top = max(drives + [0.0]) + p["return"] / p["capacitance"] + 0.1
    residual = lambda v: period(p, element, v)[0][-1] - v
    if residual(0.0) <= 0:
        return {"collapses": True, "periods": count(p, element)}
    v = brentq(residual, 0.0, top, xtol=1e-11, rtol=1e-13, maxiter=200)
    points, q_rr = period(p, element, v)
    return {"collapses": False, "before": v, "after": points[0], "low": min(points), "high": max(points), "recovery": q_rr}


def diode(rng, kind):
    """nVT, ln IS from a drop at 1 A."""
    if kind == "sharp":  # two near-equal points
        nvt = 0.0002 / math.log(1000)
        return nvt, -0.4 / nvt
    nvt = (rng.uniform(1.0, 2.0) if kind == "silicon" else rng.uniform(1.0, 1.2)) * KT_Q_25
    drop = rng.uniform(0.6, 0.95) if kind == "silicon" else rng.uniform(0.25, 0.5)
    return nvt, -drop / nvt


def log_uniform(rng, a, b):
    return float(math.exp(rng.uniform(math.log(a), math.log(b))))


def base(rng, kind="silicon", duty=None, frequency=None, bus=None):
    f = frequency or log_uniform(rng, 5e3, 1e6)
    period_time = 1 / f
    d = rng.uniform(0.05, 0.9) if duty is None else duty
    dead = min(log_uniform(rng, 15e-9, 500e-9), 0.2 * min(d, 1 - d) * period_time)
    vdd = float(rng.choice([5.25, 12.0, 15.0, 18.0]))
    charge = log_uniform(rng, 5e-9, 200e-9)
    c = charge / log_uniform(rng, 0.05, 0.5)
    load = log_uniform(rng, 20e-6, 1e-3)
    nvt, ln_is = (None, None) if kind == "switch" else diode(rng, kind)
    v_ls, v_sd = rng.uniform(-0.3, 0.3), rng.uniform(0.6, 1.2)
    switch = kind == "switch"
    interval = lambda t, e, on=True: {"duration": float(t), "drive": float(e), "conducts": on, "load": load, "conductance": 0.0}
    return {
        "element": {"slope": nvt or 0.0, "log_saturation": ln_is or 0.0, "resistance": log_uniform(rng, 0.5, 30), "switch": switch},
        "capacitance": c,
        "on": interval(d * period_time - dead, vdd - (bus or log_uniform(rng, 24, 800)), not switch),
        "off": [
            interval(dead, vdd + v_sd, not switch),
            interval((1 - d) * period_time - dead, vdd - v_ls),
            interval(dead, vdd + v_sd, not switch),
        ],
        "start": vdd - 0.7, "lockout": 0.55 * vdd, "charge": charge, "charge_per_volt": 0.0, "return": 0.0, "recovery_spec": 0.0, "recovery_tau": 0.0,
    }


def cases():
    rng = np.random.default_rng(SEED)
    out = []

    def add(name, p):
        out.append({"name": name, **p})

    for d in (0.05, 0.2, 0.35, 0.5, 0.65, 0.8, 0.9, 0.95, 0.98, 0.995):
        for kind in ("silicon", "schottky"):
            add(f"{kind} duty {d}", base(rng, kind, duty=d, frequency=log_uniform(rng, 5e3, 2e5)))
    for d in (0.3, 0.6, 0.9):
        add(f"fixed drop duty {d}", base(rng, "sharp", duty=d, frequency=log_uniform(rng, 1e4, 2e5)))
    for n in range(8):  # dead-time node far below the low-side drop: peak detector
        p = base(rng, "schottky" if n % 2 else "silicon", frequency=log_uniform(rng, 1e5, 1e6))
        v_sd = rng.uniform(1.8, 5.0)
        for k in (0, 2):
            p["off"][k]["drive"] = p["off"][1]["drive"] + v_sd
        p["on"]["load"] = p["off"][0]["load"] = p["off"][1]["load"] = p["off"][2]["load"] = log_uniform(rng, 20e-6, 200e-6)
        add(f"pumped {n}", p)
    for n in range(5):  # light load: the node takes most of the first dead time to fall, or never commutates
        p = base(rng, "silicon", frequency=log_uniform(rng, 1e4, 3e5))
        whole = p["off"][0]["duration"]
        falling = {**p["off"][0], "duration": whole * rng.uniform(0.4, 1.0), "drive": p["on"]["drive"]}
        if n == 4:
            falling["duration"] = whole
        p["off"] = [falling, {**p["off"][0], "duration": whole - falling["duration"]}] + p["off"][1:]
        add(f"light load {n}", p)
    for n in range(4):  # sinking: dead time at the bus
        p = base(rng, "silicon")
        for k in (0, 2):
            p["off"][k]["drive"] = p["on"]["drive"] - 1
        add(f"sinking {n}", p)
    for n in range(6):  # collapsing: too much charge for the window, or no window
        p = base(rng, "silicon", duty=0.97, frequency=2e5)
        p["element"]["resistance"] = log_uniform(rng, 60, 400)
        p["charge"] = log_uniform(rng, 80e-9, 400e-9)
        if n == 5:
            p["off"] = [{**iv, "drive": p["on"]["drive"]} for iv in p["off"]]
        add(f"collapsing {n}", p)
    for n in range(4):  # deep deficit, still positive
        p = base(rng, "silicon", duty=0.9, frequency=3e5)
        p["element"]["resistance"] = log_uniform(rng, 40, 100)
        p["charge"] = log_uniform(rng, 15e-9, 25e-9)
        add(f"deficit {n}", p)
    for n in range(8):
        p = base(rng, "switch", duty=rng.uniform(0.1, 0.98))
        if n % 2:
            p["on"]["conductance"] = 1 / log_uniform(rng, 1e3, 1e5)
        add(f"switch {n}", p)
    for n in range(6):  # gate-source resistor
        p = base(rng, "silicon" if n % 2 else "schottky", frequency=log_uniform(rng, 1e3, 2e5))
        p["on"]["conductance"] = 1 / log_uniform(rng, 5e3, 1e5)
        add(f"gate resistor {n}", p)
    for n in range(6):  # bus so low that the element conducts during the on-time
        p = base(rng, "silicon" if n % 2 else "schottky", bus=rng.uniform(0.2, 4), frequency=log_uniform(rng, 1e3, 1e5))
        p["on"]["conductance"] = 1 / log_uniform(rng, 1e3, 5e4)
        if n >= 4:  # standstill: the on-time is what recharges
            p["off"] = [{**iv, "drive": -20.0} for iv in p["off"]]
        add(f"low bus {n}", p)
    for n in range(8):  # recovery and charge that grows with the drive
        p = base(rng, "silicon", duty=rng.uniform(0.2, 0.95))
        i_test = rng.uniform(0.2, 1.0)
        p["recovery_spec"] = log_uniform(rng, 3e-9, 60e-9)
        p["recovery_tau"] = p["recovery_spec"] / i_test
        p["charge_per_volt"] = p["charge"] / 10 * rng.uniform(0.2, 1.0)
        p["charge"] *= 0.3
        p["return"] = rng.uniform(0.1, 1) * 1e-9
        if n >= 5:  # peak detector: only the dead time has conducted
            for k in (0, 2):
                p["off"][k]["drive"] += 2.5
        add(f"recovery {n}", p)
    for n in range(4):  # long hold: motor drive at low frequency
        p = base(rng, "silicon", frequency=log_uniform(rng, 20, 1000))
        p["capacitance"] = log_uniform(rng, 2e-6, 50e-6)
        p["on"]["conductance"] = 1 / log_uniform(rng, 1e4, 1e5)
        add(f"slow {n}", p)
    return out


def main():
    results, worst = [], 0.0
    for n, p in enumerate(cases()):
        p["expected"] = steady(p)
        if n % 9 == 0 and not p["expected"]["collapses"]:
            again = period(p, Element(p["element"]), p["expected"]["before"], "Radau")[0][-1]
            worst = max(worst, abs(again - p["expected"]["before"]))
        results.append(p)
        print(p["name"], p["expected"], file=sys.stderr)
    doc = {
        "script": "recharge.py", "seed": SEED, "python": sys.version.split()[0], "scipy": scipy.__version__, "numpy": np.__version__,
        "method": "solve_ivp LSODA rtol 1e-11, brentq", "radau_difference_per_period": worst, "cases": results,
    }
    path = pathlib.Path(__file__).with_suffix(".json")
    path.write_text(json.dumps(doc, indent=1) + "\n")


if __name__ == "__main__":
    main()
