#!/usr/bin/env python3
"""Reference values for the first charge of bootstrap capacitors: writes startup.json beside this file.

Problem   continuous  C dv/dt = i(E - v) - I: time to a target, v at a time.
          pulsed      the same for the width w of each period, C dv/dt = -I for the rest: time to a target and number of pulses, v
                      at a time.
          reservoir   C_VDD dV/dt = I_s - n i, C_B dv/dt = i - I, i = i(V - v), as two unknowns: V and the time where n i = max(I_s, n I).
          i from u = R i + nVT ln(1 + i/IS) (or i = u/R for a switch).
Method    scipy.integrate.solve_ivp, Radau, rtol 3e-13, in scaled time with the analytic Jacobian; i by scipy.special.wrightomega.
          A time is where an integration that ends there meets its condition: the event of the dense output, then Newton steps with a
          new integration each. Every third case again by LSODA, rtol 1e-11; the largest differences are stored. Pulses are integrated
          one by one, however many. Nothing of the closed-form law under test is used.
Cases     seeded; each stores every input in SI units.

Run: /usr/bin/python3 startup.py      (about two minutes)
"""
import json
import math
import pathlib
import sys

import numpy as np
import scipy
from scipy.integrate import solve_ivp
from scipy.special import wrightomega

SEED = 20240823
TOLERANCE = {"Radau": 3e-13, "LSODA": 1e-11}
KT_Q_25 = 1.380649e-23 * 298.15 / 1.602176634e-19


class Element:
    def __init__(self, d):
        self.r, self.switch = d["resistance"], d["switch"]
        self.nvt, self.ln_is = d["slope"], d["log_saturation"]
        self.i_s = 0.0 if self.switch else math.exp(self.ln_is)

    def current(self, u):
        """i and di/du."""
        if self.switch:
            return u / self.r, 1 / self.r
        k = self.r / self.nvt
        s = float(wrightomega((u + self.i_s * self.r) / self.nvt + self.ln_is + math.log(k))) / k
        return s - self.i_s, s / (s * self.r + self.nvt)

    def drop(self, i):
        return self.r * i + (0.0 if self.switch else self.nvt * float(np.logaddexp(0.0, math.log(i) - self.ln_is)))


def solve(rhs, jac, y0, t, method, event=None):
    sol = solve_ivp(
        lambda _, y: [t * f for f in rhs(y)], (0, 1), y0, method=method, rtol=TOLERANCE[method], atol=1e-14,
        jac=lambda _, y: [[t * f for f in row] for row in jac(y)], events=event and (lambda _, y: event(y)), dense_output=event is not None)
    if not sol.success:
        raise RuntimeError(sol.message)
    return sol


def crossing(rhs, jac, y0, span, method, residual, rate):
    """Time and state where residual(y) turns 0 within span; rate(y) is d residual/dt."""
    event = residual
    sol = solve(rhs, jac, y0, span, method, event)
    if not len(sol.t_events[0]):
        return None
    t = float(sol.t_events[0][0]) * span
    for _ in range(3):
        y = solve(rhs, jac, y0, t, method).y[:, -1]
        t -= residual(y) / rate(y)
    return t, solve(rhs, jac, y0, t, method).y[:, -1]


class Branch:
    def __init__(self, p):
        self.e, self.c, self.drive, self.load = Element(p["element"]), p["capacitance"], p["supply"] - p["node"], p["load"]

    def rhs(self, y):
        return [(self.e.current(self.drive - y[0])[0] - self.load) / self.c]

    def jac(self, y):
        return [[-self.e.current(self.drive - y[0])[1] / self.c]]

    def after(self, v, t, method):
        return float(solve(self.rhs, self.jac, [v], t, method).y[0, -1]) if t > 0 else v

    def time_to(self, v, target, span, method):
        found = crossing(self.rhs, self.jac, [v], span, method, lambda y: y[0] - target, lambda y: self.rhs(y)[0])
        return found and found[0]


def continuous(p, method="Radau"):
    b = Branch(p)
    span = p["element"]["resistance"] * p["capacitance"]
    while True:
        t = b.time_to(p["initial"], p["target"], span, method)
        if t is not None:
            return {"time": t, "reached": b.after(p["initial"], p["at"], method)}
        span *= 4


def pulsed(p, method="Radau"):
    b = Branch(p)
    w, period = p["width"], p["period"]
    v, n = p["initial"], 0
    out = {}
    while "time" not in out or "reached" not in out:
        start, end = n * period, b.after(v, w, method)
        if "time" not in out and end >= p["target"]:
            out["time"], out["pulses"] = start + b.time_to(v, p["target"], w * (1 + 1e-9), method), n + 1
        if "reached" not in out and p["at"] < start + period:
            rest = p["at"] - start
            out["reached"] = b.after(v, rest, method) if rest <= w else end - p["load"] * (rest - w) / b.c
        v, n = end - p["load"] * (period - w) / b.c, n + 1
        if n > 20000:
            raise RuntimeError("does not arrive")
    return out


def reservoir(p, method="Radau"):
    e, n, cb, cv, load, supply = Element(p["element"]), p["count"], p["bootstrap"], p["reservoir"], p["load"], p["supply_current"]
    end = max(supply / n, load)
    if e.current(p["supply"] - p["initial"])[0] <= end:
        return {"lowest": p["supply"], "time": 0.0}

    def rhs(y):
        i = e.current(y[0] - y[1])[0]
        return [(supply - n * i) / cv, (i - load) / cb]

    def jac(y):
        g = e.current(y[0] - y[1])[1]
        return [[-n * g / cv, n * g / cv], [g / cb, -g / cb]]

    residual = lambda y: y[0] - y[1] - e.drop(end)
    rate = lambda y: rhs(y)[0] - rhs(y)[1]
    span = p["element"]["resistance"] / (n / cv + 1 / cb)
    while True:
        found = crossing(rhs, jac, [p["supply"], p["initial"]], span, method, residual, rate)
        if found:
            return {"lowest": float(found[1][0]), "time": found[0]}
        span *= 4


def log_uniform(rng, a, b):
    return float(math.exp(rng.uniform(math.log(a), math.log(b))))


def element(rng, kind):
    r = log_uniform(rng, 1, 40)
    if kind == "switch":
        return {"slope": 0.0, "log_saturation": 0.0, "resistance": r, "switch": True}
    if kind == "sharp":  # two near-equal points
        nvt = 0.0002 / math.log(1000)
        return {"slope": nvt, "log_saturation": -0.5 / nvt, "resistance": r, "switch": False}
    nvt = (rng.uniform(1.0, 2.0) if kind == "silicon" else rng.uniform(1.0, 1.2)) * KT_Q_25
    drop = rng.uniform(0.6, 0.95) if kind == "silicon" else rng.uniform(0.25, 0.5)
    return {"slope": nvt, "log_saturation": -drop / nvt, "resistance": r, "switch": False}


def charge(rng, kind):
    return {
        "element": element(rng, kind), "capacitance": log_uniform(rng, 47e-9, 47e-6), "supply": float(rng.choice([5.25, 12.0, 15.0, 18.0])),
        "node": float(rng.choice([0.0, 0.0, 0.4])), "load": log_uniform(rng, 20e-6, 2e-3),
        "initial": float(rng.choice([0.0, 0.0, 2.0])),
    }


def cases():
    rng = np.random.default_rng(SEED)
    kinds = ("silicon", "schottky", "switch", "sharp")
    out = []
    for n in range(16):
        p = charge(rng, kinds[n % 4])
        if n in (4, 5, 6, 7):
            p["load"] = 0.0
        e = Element(p["element"])
        # to where the element carries a small multiple of the load, or 1 mA without a load
        p["target"] = p["supply"] - p["node"] - e.drop(log_uniform(rng, 1.05, 30) * (p["load"] or 1e-3))
        p["at"] = p["element"]["resistance"] * p["capacitance"] * log_uniform(rng, 0.2, 6)
        out.append({"name": f"continuous {kinds[n % 4]} {n}", "kind": "continuous", **p})
    for n in range(24):
        p = charge(rng, kinds[n % 4])
        tau = p["element"]["resistance"] * p["capacitance"]
        # few long pulses, some tens, hundreds of short ones
        p["width"] = tau * (log_uniform(rng, 0.5, 5) if n < 6 else log_uniform(rng, 0.08, 0.3) if n < 12 else log_uniform(rng, 0.01, 0.03))
        delta = log_uniform(rng, 0.03, 0.9)
        p["period"] = p["width"] / delta
        swing = p["supply"] - p["node"] - p["initial"]
        # a load that matters: a fair part of what the pulses can bring
        p["load"] = min(p["load"], 0.02 * delta * swing / p["element"]["resistance"])
        if n % 5 == 4:
            p["load"] = 0.08 * delta * swing / p["element"]["resistance"]
        e = Element(p["element"])
        drop = p["load"] * (p["period"] - p["width"]) / p["capacitance"]
        p["target"] = p["supply"] - p["node"] - e.drop(p["load"] / delta * log_uniform(rng, 1.5, 4)) - drop
        p["at"] = p["width"] / delta * (rng.uniform(0.3, 3) if n < 6 else rng.uniform(5, 60) if n < 12 else rng.uniform(100, 400))
        out.append({"name": f"pulsed {kinds[n % 4]} {n}", "kind": "pulsed", **p})
    for n in range(24):
        d = element(rng, kinds[n % 4])
        cb = log_uniform(rng, 100e-9, 22e-6)
        count = int(rng.choice([1, 2, 3, 6]))
        p = {
            "element": d, "bootstrap": cb, "reservoir": cb * log_uniform(rng, 0.5, 30), "count": count,
            "supply": float(rng.choice([5.25, 12.0, 15.0, 18.0])), "initial": float(rng.choice([0.0, 0.0, 2.0])),
            "load": log_uniform(rng, 20e-6, 2e-3), "supply_current": 0.0,
        }
        if n >= 8:  # a limit between the loads and the peak
            peak = count * Element(d).current(p["supply"] - p["initial"])[0]
            p["supply_current"] = log_uniform(rng, 1.1 * count * p["load"], 0.7 * peak)
        if n == 22:  # less than the loads
            p["supply_current"] = 0.5 * count * p["load"]
        if n == 23:  # more than the peak
            p["supply_current"] = 1.01 * peak
        out.append({"name": f"reservoir {kinds[n % 4]} {n}", "kind": "reservoir", **p})
    return out


def main():
    run = {"continuous": continuous, "pulsed": pulsed, "reservoir": reservoir}
    results, volts, times = [], 0.0, 0.0
    for n, p in enumerate(cases()):
        p["expected"] = run[p["kind"]](p)
        if n % 3 == 0 and not (p["kind"] == "pulsed" and p["expected"]["pulses"] > 100):
            again = run[p["kind"]](p, "LSODA")
            v = "lowest" if p["kind"] == "reservoir" else "reached"
            volts = max(volts, abs(again[v] - p["expected"][v]))
            times = max(times, abs(again["time"] / p["expected"]["time"] - 1)) if p["expected"]["time"] else times
        results.append(p)
        print(p["name"], p["expected"], file=sys.stderr)
    doc = {
        "script": "startup.py", "seed": SEED, "python": sys.version.split()[0], "scipy": scipy.__version__, "numpy": np.__version__,
        "method": "solve_ivp Radau rtol 3e-13", "lsoda_difference_volts": volts, "lsoda_difference_time": times, "cases": results,
    }
    pathlib.Path(__file__).with_suffix(".json").write_text(json.dumps(doc, indent=1) + "\n")


if __name__ == "__main__":
    main()
