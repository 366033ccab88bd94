#!/usr/bin/env python3
"""Reference values for the charge of bootstrap capacitors in groups from one reservoir: writes staged.json beside this file.

Problem   C_VDD dV/dt = s - sum i_k,  C_B dv_k/dt = i_k - I,  i_k = i(V - v_k), every capacitor with a state of its own. A capacitor is
          connected when its group starts; until then it keeps its v. The supply's current s is its limit I_s while V lies below V_DD; at
          V_DD it is what is drawn, as long as that is no more than I_s. A group starts at a multiple of an interval, or when the group
          before has come to a target. Asked for: the time at which the last group comes to the target, the lowest V until then and, where
          V is still falling, until it rises, and the start of the last group.
          i from u = R i + nVT ln(1 + i/IS) (or i = u/R for a switch).
Method    scipy.integrate.solve_ivp, LSODA, rtol 1e-11, atol 1e-12 V, in scaled time; i by scipy.special.wrightomega. V_DD regained, the
          current above the limit again, the target and the minimum are events of the dense output. Each case again by DOP853 where that
          is not stiff, else by Radau, rtol 1e-10; the largest differences are stored. Nothing of the closed-form law under test is used.
Cases     seeded; each stores every input in SI units.

Run: /usr/bin/python3 staged.py      (about a minute)
"""
import json
import math
import pathlib
import sys

import numpy as np
import scipy
from scipy.integrate import solve_ivp

from startup import Element, element, log_uniform

SEED = 20261201
TOLERANCE = {"LSODA": 1e-11, "DOP853": 1e-10, "Radau": 1e-10}


class Charge:
    def __init__(self, p, method):
        self.p, self.method, self.e = p, method, Element(p["element"])
        self.y = np.array([p["supply"]] + [p["initial"]] * p["stages"])
        self.connected, self.t, self.lowest = 0, 0.0, p["supply"]

    def currents(self, y):
        return np.array([self.e.current(y[0] - v)[0] for v in y[1 : 1 + self.connected]])

    def rates(self, y, held):
        p, d = self.p, np.zeros_like(y)
        i = self.currents(y)
        d[0] = 0.0 if held else (p["supply_current"] - i.sum()) / p["reservoir"]
        d[1 : 1 + self.connected] = (i - p["load"]) / p["bootstrap"]
        return d

    def excess(self, y):
        return self.currents(y).sum() - self.p["supply_current"]

    def run(self, until, stop):
        """Up to a time, or to where stop(y) turns above 0, which is looked for at the ends of the steps and within them."""
        p = self.p
        while self.t < until:
            held = self.y[0] >= p["supply"] and self.excess(self.y) <= 0
            span = min(until - self.t, self.scale())
            # The events' signs: stop from below; V back at V_DD from below, or too much drawn while it is held; the minimum from above.
            back = (lambda s, y: self.excess(y)) if held else (lambda s, y: y[0] - p["supply"])
            events = [lambda s, y: stop(y), back, lambda s, y: -self.excess(y)]
            for f, terminal in zip(events, (True, True, False)):
                f.terminal, f.direction = terminal, 1
            if held:
                events.pop()
            sol = solve_ivp(lambda s, y: span * self.rates(y, held), (0, 1), self.y, method=self.method, rtol=TOLERANCE[self.method],
                            atol=1e-12, events=events, dense_output=True, first_step=1e-4)
            if sol.status < 0:
                raise RuntimeError(sol.message)
            self.t += span * sol.t[-1]
            self.y = sol.y[:, -1].copy()
            self.lowest = min(self.lowest, self.y[0])
            if not held:
                for y in sol.y_events[2]:
                    self.lowest = min(self.lowest, y[0])
            if len(sol.t_events[1]) and not held:
                self.y[0] = p["supply"]
            if len(sol.t_events[0]):
                return True
        return False

    def scale(self):
        """A time over which to look for events: the charge of one capacitor, or the refill of the reservoir where that is longer."""
        p = self.p
        return max(20 * p["element"]["resistance"] * p["bootstrap"], 0.3 * p["supply"] * p["reservoir"] / p["supply_current"])


def charge(p, method):
    c = Charge(p, method)
    left = p["stages"]
    while left:
        n = min(left, p["count"])
        left -= n
        c.connected += n
        start, k = c.t, c.connected
        here = lambda y: y[k] - p["target"]
        if p["interval"] is not None and left:
            c.run(start + p["interval"], lambda y: -1.0)
            c.t = start + p["interval"]
            continue
        if not c.run(math.inf, here):
            raise RuntimeError("does not arrive")
    arrived = c.t
    if c.excess(c.y) > 0:  # still falling
        if not c.run(math.inf, lambda y: -c.excess(y)):
            raise RuntimeError("does not turn")
    return {"time": arrived, "lowest": float(c.lowest), "start": start}


def cases():
    rng = np.random.default_rng(SEED)
    kinds = ("silicon", "schottky", "sharp", "switch")
    out = []
    for n in range(40):
        kind, order = kinds[n % 4], ("together", "waiting", "spaced", "crowded", "many")[n // 4 % 4 if n < 32 else 4]
        d = element(rng, kind)
        cb = log_uniform(rng, 100e-9, 22e-6)
        stages = 12 if order == "many" else int(rng.choice([2, 3, 5, 6]))
        p = {
            "element": d, "bootstrap": cb, "reservoir": cb * log_uniform(rng, 3, 40), "stages": stages,
            "count": stages if order == "together" else int(rng.choice([1, 1, 2])), "interval": None,
            "supply": float(rng.choice([12.0, 15.0, 18.0])), "initial": float(rng.choice([0.0, 0.0, 2.0])), "load": log_uniform(rng, 20e-6, 1e-3),
        }
        e = Element(d)
        peak = e.current(p["supply"] - p["initial"])[0]
        p["supply_current"] = log_uniform(rng, max(1.5 * stages * p["load"], 0.01 * peak), 0.4 * peak)
        p["target"] = p["supply"] - e.drop(2 * p["load"]) - rng.uniform(0.2, 2.5)
        refill = cb * p["supply"] / p["supply_current"]
        if order == "spaced":  # about the time in which the supply brings what a group takes
            p["interval"] = refill * log_uniform(rng, 0.5, 4) * p["count"]
        if order == "crowded" or order == "many" and n % 8 >= 4:  # several groups charge at once
            p["interval"] = d["resistance"] * cb * log_uniform(rng, 0.03, 2)
        out.append({"name": f"{order} {kind} {n}", "kind": order, **p})
    return out


def main():
    results, volts, times = [], 0.0, 0.0
    for n, p in enumerate(cases()):
        p["expected"] = charge(p, "LSODA")
        again = charge(p, "Radau" if p["element"]["slope"] < 1e-3 and not p["element"]["switch"] else "DOP853")
        volts = max(volts, abs(again["lowest"] - p["expected"]["lowest"]))
        times = max(times, abs(again["time"] / p["expected"]["time"] - 1))
        results.append(p)
        print(p["name"], p["expected"], again, file=sys.stderr)
    doc = {
        "script": "staged.py", "seed": SEED, "python": sys.version.split()[0], "scipy": scipy.__version__, "numpy": np.__version__,
        "method": "solve_ivp LSODA rtol 1e-11", "second_difference_volts": volts, "second_difference_time": times, "cases": results,
    }
    pathlib.Path(__file__).with_suffix(".json").write_text(json.dumps(doc, indent=1) + "\n")


if __name__ == "__main__":
    main()
