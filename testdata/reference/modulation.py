#!/usr/bin/env python3
"""Reference values for a floating supply over a fundamental, a revolution, a burst, a first charge and a hold: writes modulation.json
beside this file.

Problem   V_BS = v of the capacitor C. Within an interval C dv/dt = i(E - v) - I - G v with E = V_DD - v_node, I the loads (always), G the
          pull-down (only while the high side is on); i from u = R i + nVT ln(1 + i/IS), or i = u/R for a switch; i = 0 where the element
          is blocked or not driven. Sought: the periodic solution over all carrier periods of a fundamental.

Conventions, sinusoidal
  Sampling   N = periods carrier periods per fundamental, T = 1/switching_frequency, f_1 = 1/(N T). Period k, 0 <= k < N, has the angle
             theta_k = 2 pi k/N; duty and current are taken there, at its start, and stay for the whole period. No ripple.
  Duty       With u_a, u_b, u_c = m sin(theta), m sin(theta - 120 deg), m sin(theta + 120 deg): d = 1/2 + (u_a + z)/2, clipped to [0, 1];
             within 1e-12 of 0 or 1 it is 0 or 1. z: NONE 0; THIRD_HARMONIC m sin(3 theta)/6; MIN_MAX -(max + min)/2; CLAMP_120_HIGH
             1 - max; CLAMP_120_LOW -1 - min; CLAMP_60 the former where |max| > |min| + 1e-9, else the latter, as at theta = 0
             where they are equal (d = 1 between 60 and 120 deg). Over-modulated, max and min are those of the unclipped references.
  Current    i = current sin(theta_k - displacement), out of the node: > 0 sourcing, < 0 sinking. Displacements are such that no sample
             is 0. |displacement| > 90 deg is regenerating.
  Frame      A period begins where the high side turns on or would turn on, a dead time after its command: on, dead, low on, dead.
             d = 1: on for T. Else on = d T - t_dt; if on <= 0 or on < shortest_pulse (and so for d = 0): low side on for T, no dead
             times. Else low = (1 - d) T - t_dt; if low <= 0 or low < shortest_pulse the low side stays off for the gap T - on. Each
             period keeps this form whatever its neighbours are; no sample lies within 1e-6 T of a limit.
  Node       On and wherever it is not low: element blocked. First dead time, sourcing: not low for t_com = output_charge/|i| (output_charge
             is 2 Q_oss; at most the dead time), then at -V_SD. First dead time, sinking: not low. Low side on: sourcing -|i| on_resistance
             (IGBT: -V_SD), sinking +|i| on_resistance (IGBT: saturation_level + saturation_resistance |i|). Second dead time, sourcing:
             at -V_SD; sinking: not low (it rises as the low side turns off). A gap, sourcing: not low for t_com, then at -V_SD; sinking:
             not low. V_SD = reverse_level + reverse_resistance |i|. Channel drops stay below V_SD.
  Element    A diode conducts by its law wherever the node is low, with i down to -IS; where the node is not low its leakage belongs to I.
             A switch conducts, both ways, while the low side is on and at no other time.
  Edges      As the high side turns on from off, charge + charge_per_volt v' leave (gates and level shift; v' is v after it). After a period
             with d = 1 it is on already and nothing leaves; before one it does. As the node rises, junction_charge + Q_rr leave: where it
             is low at the end of a period and the next is on at once, just before the high side turns on; sinking, as the low side turns
             off, a dead time before. A gap in which the node never falls has neither. As the node falls, after any wait, junction_charge
             returns. A node that is not low at the end of a period falls at the start of a next one that is low from its start.
  Q_rr       min(recovery_spec, sum over the intervals of this period that reach to the rise without a break, last first, of
             tau i (exp(-a/tau) - exp(-b/tau))), a and b the times from the interval's end and start to the rise, i the current at the v
             just before the rise and the interval's E, but no more than that of any later interval; an interval with v >= E ends the sum.
Conventions, sixStep
             N a multiple of 12. High sector 30 to 150 deg, low sector 210 to 330 deg, open between. Current +current in the high sector,
             -current in the low one. The chopped switch is on for duty T at the start of each period, its opposite stays off (no dead
             times); in a sector that is not chopped the switch stays on. Rest of a chopped period: high sector sourcing, not low for
             t_com, then -V_SD; sinking, not low; low sector sinking, not low; sourcing, -V_SD. Open: not low, no pull-down; nothing is
             counted of the current that dies away after a sector. So low falls at the end of the open sixth after the high sector,
             low_sourcing at the end of the high sector.
Conventions, burst
             active periods with constant duty and current as above, then idle (idle_time) with both switches off, loads only, node at
             idle_node: a diode conducts by its law where E = V_DD - idle_node > 0, a switch does not. Idle begins without any charge and
             ends with the edges of a low node: junction_charge + Q_rr (of the idle current), then the gate's.
Conventions, precharge
             node (0 V, or its pre-bias) constant, from initial. Continuous: time to target. Pulsed: the element conducts for width at
             the start of each period; time to target, counted from the first pulse's start, and the number of pulses begun.
Conventions, heldOn
             loads and pull-down from initial for duration, no edge.

Results   low, high: extremes over the fundamental; low_angle: of the period that low is in [deg], in a burst [periods]; the first of two
          where one ends and the next begins with it
          rival_difference: lowest outside low's period and its neighbours, less low (a small one makes low_angle moot)
          low_sourcing: lowest while the high side is on and i > 0, from after its turn-on; null where there is none
          before: V_BS at 24 angles nearest to 0, 15 .. 345 deg (of 24 parts of a burst), just before the edges that begin period at_period:
          before the node's rise where it rises, else at the end of the period before
          recharge_current: mean over the fundamental of the element's current
          without_refresh: longest time from the end of an interval in which the element conducts (could, by node and drive) to the end
          of an on-time before it conducts again; null where it never does
          longest_on: longest uninterrupted on-time
          collapses: low <= 0; the numbers then continue the model and are no voltages
          burst: idle_end, V_BS at the end of idle, and restarts, whether it stands above uvlo_rising
          precharge: arrives, time, pulses (pulsed), peak_current (at the start), reached (v at the time at), settled (i = I; continuous)
          heldOn: end, time_to_lockout

Method    Multiple shooting: every carrier period of every case is integrated by an explicit Runge-Kutta pair of order 8(5,3) (Hairer,
          Norsett, Wanner; the coefficients of scipy.integrate.DOP853) with a step of its own, all periods at once, with ∫i dt and the
          derivative by the initial value; Newton's method closes the ring until every period starts within 1e-9 V of where the one before
          ends. i by scipy.special.wrightomega. Nothing of the closed-form law under test is used. Extremes lie at ends of intervals.
Checks    by assertion: charge balance of each ring to 1e-6; rings of switches against the composition of their exponentials; ten rings, or
          48 periods of them, by LSODA, one period after another, and one ring from rest until periodic; periods and duties worked by hand;
          hold and resistor charge against exponentials; the maps increase; pairs of cases order as they must. Some ten seconds in all.

Run: /usr/bin/python3 modulation.py
"""
import json
import math
import pathlib
import sys
import time

import numpy as np
import scipy
from scipy.integrate import DOP853, solve_ivp
from scipy.special import wrightomega

from modulation_cases import cases

TOLERANCE = 1e-10  # of a step [V]
SLOTS = ("on", "wait", "first", "low", "second", "rest")  # a period's intervals in order
LOW_SLOTS = ("first", "low", "second")  # those in which the node is low


# The element

class Elements:
    """Elements of many periods at once."""

    def __init__(self, ds):
        column = lambda key: np.array([d[key] for d in ds], float)
        self.r, self.nvt, self.ln_is = column("resistance"), column("slope"), column("log_saturation")
        self.switch = np.array([d["switch"] for d in ds])
        self.nvt = np.where(self.switch, 1.0, self.nvt)
        self.i_s = np.where(self.switch, 0.0, np.exp(self.ln_is))
        self.k = self.r / self.nvt
        self.offset = self.i_s * self.k + self.ln_is + np.log(self.k)

    def take(self, index):
        out = object.__new__(Elements)
        for name, value in vars(self).items():
            setattr(out, name, value[index])
        return out

    def current(self, u):
        """i and di/du."""
        s = wrightomega(u / self.nvt + self.offset) / self.k
        return np.where(self.switch, u / self.r, s - self.i_s), np.where(self.switch, 1 / self.r, s / (s * self.r + self.nvt))


def scalar_current(d, u):
    if d["switch"]:
        return u / d["resistance"]
    k = d["resistance"] / d["slope"]
    i_s = math.exp(d["log_saturation"])
    return float(wrightomega((u + i_s * d["resistance"]) / d["slope"] + d["log_saturation"] + math.log(k))) / k - i_s


def drop(d, i):
    return d["resistance"] * i + (0.0 if d["switch"] else d["slope"] * float(np.logaddexp(0.0, math.log(i) - d["log_saturation"])))


# Layout of periods

def level(p, i, prefix):
    return p[prefix + "_level"] + p[prefix + "_resistance"] * abs(i)


def low_node(p, i):
    """Node while the low side is on."""
    if p["low_side"] == "IGBT":
        return -level(p, i, "reverse") if i > 0 else level(p, i, "saturation")
    assert p["on_resistance"] * abs(i) < level(p, i, "reverse")
    return -i * p["on_resistance"]


def lane(p, i, **times):
    """One period: lengths of its intervals, drive of those in which the node is low."""
    vdd, diode = p["supply"], not p["element"]["switch"]
    freewheel = vdd + level(p, i, "reverse")
    out = {slot: 0.0 for slot in SLOTS}
    out.update(times)
    assert all(out[slot] >= 0 for slot in SLOTS), out
    out.update(current=i, drive={"first": freewheel, "low": vdd - low_node(p, i), "second": freewheel},
               conducts={"first": diode, "low": True, "second": diode})
    return out


def commutation(p, i, longest):
    return min(p["output_charge"] / abs(i), longest)


def carrier(p, d, i):
    """A period with both switches driven."""
    period, dead, shortest = 1 / p["switching_frequency"], p["dead_time"], p["shortest_pulse"]
    if d >= 1:
        return lane(p, i, on=period)
    on, low = d * period - dead, (1 - d) * period - dead
    if d > 0:
        assert min(abs(on - shortest), abs(low - shortest)) > 1e-6 * period, (p["name"], d)
    if d <= 0 or on <= 0 or on < shortest:
        return lane(p, i, low=period)
    if low <= 0 or low < shortest:
        gap = period - on
        wait = commutation(p, i, gap) if i > 0 else gap
        return lane(p, i, on=on, wait=wait, first=gap - wait)
    if i > 0:
        wait = commutation(p, i, dead)
        return lane(p, i, on=on, wait=wait, first=dead - wait, low=low, second=dead)
    return lane(p, i, on=on, wait=dead, low=low, rest=dead)


def duty(p, theta):
    m, kind = p["index"], p["zero_sequence"]
    a, b, c = (m * np.sin(theta + shift) for shift in (0.0, -2 * np.pi / 3, 2 * np.pi / 3))
    top, bottom = np.max([a, b, c], 0), np.min([a, b, c], 0)
    if kind == "CLAMP_60":
        tie = np.abs(np.abs(top) - np.abs(bottom))
        assert np.all((tie > 1e-6 * m) | (tie < 1e-12)), p["name"]
    z = {"NONE": 0 * a, "THIRD_HARMONIC": m * np.sin(3 * theta) / 6, "MIN_MAX": -(top + bottom) / 2, "CLAMP_120_HIGH": 1 - top,
         "CLAMP_120_LOW": -1 - bottom, "CLAMP_60": np.where(np.abs(top) > np.abs(bottom) + 1e-9, 1 - top, -1 - bottom)}[kind]
    d = np.clip(0.5 + (a + z) / 2, 0, 1)
    return np.where(d > 1 - 1e-12, 1.0, np.where(d < 1e-12, 0.0, d))


def sinusoidal(p):
    theta = 2 * np.pi * np.arange(p["periods"]) / p["periods"]
    i = p["current"] * np.sin(theta - math.radians(p["displacement"]))
    assert np.min(np.abs(i)) > 1e-6 * p["current"], p["name"]
    return [carrier(p, float(d), float(x)) for d, x in zip(duty(p, theta), i)]


def six_step(p):
    n, period, i = p["periods"], 1 / p["switching_frequency"], p["current"]
    assert n % 12 == 0
    on = p["duty"] * period
    if p["chopping"] == "LOW_SIDE":
        high = lane(p, i, on=period)
    else:
        wait = commutation(p, i, period - on) if i > 0 else period - on
        high = lane(p, i, on=on, wait=wait, first=period - on - wait)
    if p["chopping"] == "HIGH_SIDE":
        low = lane(p, -i, low=period)
    elif i > 0:
        low = lane(p, -i, low=on, rest=period - on)
    else:
        low = lane(p, -i, low=on, second=period - on)
    opened = lane(p, 0.0, wait=period)
    return [dict(high if n <= 12 * k < 5 * n else low if 7 * n <= 12 * k < 11 * n else opened) for k in range(n)]


def burst(p):
    idle = lane(p, 0.0, low=p["idle_time"])
    idle["drive"]["low"] = p["supply"] - p["idle_node"]
    idle["conducts"]["low"] = not p["element"]["switch"] and idle["drive"]["low"] > 0
    return [carrier(p, p["duty"], p["current"]) for _ in range(p["active"])] + [idle]


def edges(lanes):
    """Marks what happens between the intervals of a ring of periods."""
    whole = lambda q: sum(q[slot] for slot in SLOTS)
    full = lambda q: q["on"] > 0 and q["on"] == whole(q)
    is_low = lambda q: any(q[slot] > 0 for slot in LOW_SLOTS)
    starts_low = lambda q: q["on"] == 0 and q["wait"] == 0
    ends_low = lambda q: is_low(q) and q["rest"] == 0
    for k, q in enumerate(lanes):
        before, after = lanes[k - 1], lanes[(k + 1) % len(lanes)]
        q["gate"] = q["on"] > 0 and not full(before)
        q["fall"] = is_low(q) and not (starts_low(q) and ends_low(before))
        q["rise"] = is_low(q) and (q["rest"] > 0 or not starts_low(after))
    assert sum(q["fall"] for q in lanes) == sum(q["rise"] for q in lanes)


# Integration of many periods at once

class Ring:
    """The periods of several cases as columns."""

    def __init__(self, cases, rings):
        owner = [n for n, ring in enumerate(rings) for _ in ring]
        flat = [q for ring in rings for q in ring]
        column = lambda key: np.array([cases[n][key] for n in owner], float)
        mark = lambda key: np.array([q[key] for q in flat])
        self.size = len(flat)
        self.element = Elements([cases[n]["element"] for n in owner])
        self.c, self.load, self.g = column("capacitance"), column("load"), column("conductance")
        self.charge, self.per_volt, self.junction = column("charge"), column("charge_per_volt"), column("junction_charge")
        self.spec, self.tau = column("recovery_spec"), np.maximum(column("recovery_tau"), 1e-30)
        self.time = {slot: mark(slot) for slot in SLOTS}
        self.gate, self.fall, self.rise = mark("gate"), mark("fall"), mark("rise")
        self.drive = {slot: np.array([q["drive"][slot] for q in flat]) for slot in LOW_SLOTS}
        self.conducts = {slot: np.array([q["conducts"][slot] for q in flat]) for slot in LOW_SLOTS}
        bounds = np.cumsum([0] + [len(ring) for ring in rings])
        self.spans = list(zip(bounds[:-1].tolist(), bounds[1:].tolist()))

    def interval(self, slot, v, tolerance):
        """v at the end, ln dv1/dv0, and ∫i dt where the element conducts, else ∫v dt."""
        t, n = self.time[slot], self.size
        drive = self.drive.get(slot, np.zeros(n))
        conducts = self.conducts.get(slot, np.zeros(n, bool))
        g = self.g if slot == "on" else np.zeros(n)
        end, grown, total = v.copy(), np.zeros(n), np.zeros(n)
        for group in (np.flatnonzero((t > 0) & conducts), np.flatnonzero((t > 0) & ~conducts)):
            if len(group):
                end[group], grown[group], total[group] = integrate(
                    v[group], t[group], drive[group], self.element.take(group) if conducts[group[0]] else None, g[group],
                    self.load[group], self.c[group], tolerance)
        return end, grown, total

    def recovered(self, v):
        q, least, later = np.zeros(self.size), np.full(self.size, np.inf), np.zeros(self.size)
        alive = self.rise & (self.spec > 0) & ~self.element.switch
        for slot in reversed(LOW_SLOTS):
            t, u = self.time[slot], self.drive[slot] - v
            present = alive & (t > 0)
            alive = alive & ~(present & ((u <= 0) | ~self.conducts[slot]))
            present &= alive
            least = np.where(present, np.minimum(least, self.element.current(u)[0]), least)
            with np.errstate(invalid="ignore"):
                part = self.tau * least * (np.exp(-later / self.tau) - np.exp(-(later + t) / self.tau))
            q = q + np.where(present, part, 0.0)
            later = later + np.where(present, t, 0.0)
        return np.minimum(q, self.spec)

    def sweep(self, v, tolerance=TOLERANCE):
        """Every period from its own v: a dictionary of what it goes through."""
        points, out = [v], {}
        recharge, held = np.zeros(self.size), np.zeros(self.size)
        after = np.where(self.gate, (self.c * v - self.charge) / (self.c + self.per_volt), v)
        log_slope = np.where(self.gate, np.log(self.c / (self.c + self.per_volt)), 0.0)
        out["after"] = after
        out["gated"] = np.where(self.gate, self.charge + self.per_volt * after, 0.0)
        points.append(after)
        v = after
        for slot in SLOTS:
            if slot == "first":
                v = v + np.where(self.fall, self.junction / self.c, 0.0)
                points.append(v)
            if slot == "rest":
                out["before"] = v
                step = 1e-6
                q_rr = self.recovered(v)
                slope = (self.recovered(v + step / 2) - self.recovered(v - step / 2)) / step
                out["recovery"] = np.where(self.rise, q_rr, 0.0)
                v = v - np.where(self.rise, (self.junction + q_rr) / self.c, 0.0)
                log_slope = log_slope + np.log(np.maximum(1 - np.where(self.rise, slope, 0.0) / self.c, 1e-3))
                points.append(v)
            v, grown, total = self.interval(slot, v, tolerance)
            log_slope = log_slope + grown
            if slot in LOW_SLOTS:
                recharge = recharge + np.where(self.conducts[slot], total, 0.0)
            if slot == "on":
                held = total
                out["on_end"] = v
            points.append(v)
        out["before"] = np.where(self.rise, out["before"], v)
        out.update(end=v, slope=np.exp(log_slope), points=np.array(points), recharge=recharge, held=held)
        return out


def integrate(v, t, drive, element, g, load, c, tolerance):
    """C dv/dt = i(E - v) - I - G v over t for each column, with steps of its own."""
    n = len(v)
    result = np.empty((3, n))
    index = np.arange(n)
    y = np.array([v, np.zeros(n), np.zeros(n)])
    done = np.zeros(n)
    with np.errstate(over="ignore"):
        h = np.minimum(1.0, 0.3 * c * (element.r if element else np.inf) / t)

    def rhs(y):
        if element is None:
            return np.array([-(load + g * y[0]) * t / c, -g * t / c, y[0] * t])
        i, slope = element.current(drive - y[0])
        return np.array([(i - load - g * y[0]) * t / c, -(slope + g) * t / c, i * t])

    f = rhs(y)
    for _ in range(100000):
        last = h >= (1 - done) * (1 - 1e-12)
        h = np.where(last, 1 - done, h)
        stages = np.empty((13, 3, len(h)))
        stages[0] = f
        for s in range(1, 12):
            stages[s] = rhs(y + h * np.tensordot(DOP853.A[s, :s], stages[:s], 1))
        new = y + h * np.tensordot(DOP853.B, stages[:12], 1)
        stages[12] = rhs(new)
        e5 = np.tensordot(DOP853.E5, stages[:, 0], 1)
        e3 = np.tensordot(DOP853.E3, stages[:, 0], 1)
        norm = np.hypot(e5, 0.1 * e3)
        error = h * e5 * e5 / np.where(norm > 0, norm, 1.0) / tolerance
        accepted = error <= 1
        factor = np.clip(0.9 * np.maximum(error, 1e-12) ** -0.125, 0.2, 8.0)
        y = np.where(accepted, new, y)
        f = np.where(accepted, stages[12], f)
        done = np.where(accepted, done + h, done)
        ready = accepted & last
        h = h * np.where(accepted, factor, np.minimum(factor, 0.9))
        if ready.any():
            result[:, index[ready]] = y[:, ready]
            keep = ~ready
            if not keep.any():
                return result
            index, y, f, done, h = index[keep], y[:, keep], f[:, keep], done[keep], h[keep]
            t, drive, g, load, c = t[keep], drive[keep], g[keep], load[keep], c[keep]
            element = element and element.take(keep)
    raise RuntimeError("too many steps")


def close(cases, rings):
    """v at the start of every period of the periodic solutions."""
    pending = list(range(len(cases)))
    found = [np.full(len(ring), 0.3 * p["supply"]) for p, ring in zip(cases, rings)]
    for turn in range(60):
        ring = Ring([cases[n] for n in pending], [rings[n] for n in pending])
        start = np.concatenate([found[n] for n in pending])
        out = ring.sweep(start, 1e-7 if turn < 4 else TOLERANCE)
        still = []
        for n, (a, b) in zip(pending, ring.spans):
            end, slope, v = out["end"][a:b], out["slope"][a:b], start[a:b]
            miss = end - np.roll(v, -1)
            shift, factor = 0.0, 1.0
            for x, s in zip(miss, slope):
                shift, factor = s * shift + x, s * factor
            delta = shift / (1 - factor)
            deltas = np.empty(b - a)
            for k in range(b - a):
                deltas[k] = delta
                delta = slope[k] * delta + miss[k]
            found[n] = v + deltas
            if turn < 5 or np.max(np.abs(deltas)) > 1e-10:
                still.append(n)
        pending = still
        if not pending:
            return found, turn + 1
    raise RuntimeError("not closed: " + ", ".join(cases[n]["name"] for n in pending))


def spell(lanes):
    """without_refresh and longest_on, from the layout alone."""
    now, refreshed, longest, running, longest_on = 0.0, None, None, 0.0, 0.0
    for q in lanes + lanes:
        for slot in SLOTS:
            if q[slot] <= 0:
                continue
            now += q[slot]
            running = running + q[slot] if slot == "on" else 0.0
            longest_on = max(longest_on, running)
            if slot in LOW_SLOTS and q["conducts"][slot]:
                refreshed = now
            if slot == "on" and refreshed is not None:
                longest = max(longest or 0.0, now - refreshed)
    return longest, min(longest_on, now / 2)


def first_of(distance):
    """The first period at the minimum: the end of one is the start of the next. Which it is must be no accident of rounding."""
    assert np.all((distance < 5e-10) | (distance > 5e-9)), np.sort(distance)[:4]
    return int(np.flatnonzero(distance < 5e-10)[0])


def periodic(p, lanes, out, a, b):
    n = len(lanes)
    points = out["points"][:, a:b]
    lowest = points.min(0)
    k_low = first_of(lowest - lowest.min())
    sourcing = np.array([q["on"] > 0 and q["current"] > 0 for q in lanes])
    on_lowest = np.minimum(out["after"][a:b], out["on_end"][a:b])
    others = [k for k in range(n) if min((k - k_low) % n, (k_low - k) % n) > 1]
    at = [round(j * n / 24) % n for j in range(24)] if n >= 24 else list(range(n))
    period = sum(q[slot] for q in lanes for slot in SLOTS)
    scale = 1 if p["kind"] == "burst" else 360 / n
    without, longest = spell(lanes)
    result = {
        "low": float(lowest[k_low]), "low_angle": k_low * scale, "high": float(points.max()),
        "rival_difference": float(lowest[others].min() - lowest[k_low]) if others else 0.0,
        "low_sourcing": float(on_lowest[sourcing].min()) if sourcing.any() else None,
        "recharge_current": float(out["recharge"][a:b].sum() / period),
        "without_refresh": without, "longest_on": longest, "collapses": bool(lowest[k_low] <= 0),
        "at_period": at, "before": [float(out["before"][a + (k - 1) % n]) for k in at],
    }
    if p["kind"] == "burst":
        result["idle_end"] = float(out["before"][b - 1])
        result["restarts"] = result["idle_end"] > p["uvlo_rising"]
        assert abs(result["idle_end"] - p["uvlo_rising"]) > 1e-3
    return result


# Modes without a ring

def charge_up(p, v, t, event=None, method="Radau"):
    """v after t of recharge; with an event, the time at which v reaches it, None if it does not."""
    d, drive = p["element"], p["supply"] - p["node"]
    sol = solve_ivp(lambda _, y: [(scalar_current(d, drive - y[0]) - p["load"]) * t / p["capacitance"]], (0, 1), [v], method=method,
                    rtol=1e-12, atol=1e-13, events=event and (lambda _, y: y[0] - event), dense_output=event is not None)
    assert sol.success, sol.message
    if event is None:
        return float(sol.y[0, -1])
    return float(sol.t_events[0][0]) * t if len(sol.t_events[0]) else None


def precharge(p):
    d, c, drive = p["element"], p["capacitance"], p["supply"] - p["node"]
    out = {"peak_current": scalar_current(d, drive - p["initial"])}
    if "width" not in p:
        out["settled"] = drive - drop(d, p["load"])
        out["arrives"] = p["target"] < out["settled"]
        out["reached"] = charge_up(p, p["initial"], p["at"])
        span = p["element"]["resistance"] * c
        while out["arrives"] and "time" not in out:
            t = charge_up(p, p["initial"], span, p["target"])
            if t is not None:
                out["time"] = t
            span *= 4
        return out
    v, n, width, period = p["initial"], 0, p["width"], p["period"]
    while ("arrives" not in out or "reached" not in out) and n < 3000:
        end = charge_up(p, v, width)
        if "arrives" not in out and end >= p["target"]:
            out.update(arrives=True, time=n * period + charge_up(p, v, width, p["target"]), pulses=n + 1)
        rest = p["at"] - n * period
        if "reached" not in out and rest < period:
            out["reached"] = charge_up(p, v, rest) if rest <= width else end - p["load"] * (rest - width) / c
        after = end - p["load"] * (period - width) / c
        if "arrives" not in out and abs(after - v) < 1e-9:
            out["arrives"] = False
        v, n = after, n + 1
    assert "arrives" in out and "reached" in out, p["name"]
    return out


def hold(p):
    rhs = lambda _, y: [-(p["load"] + p["conductance"] * y[0]) / p["capacitance"]]
    span = 100 * p["duration"]
    sol = solve_ivp(rhs, (0, p["duration"]), [p["initial"]], method="DOP853", rtol=1e-12, atol=1e-13)
    event = lambda _, y: y[0] - p["lockout"]
    event.terminal = True
    to = solve_ivp(rhs, (0, span), [p["initial"]], method="DOP853", rtol=1e-12, atol=1e-13, events=event)
    assert sol.success and to.success
    out = {"end": float(sol.y[0, -1]), "time_to_lockout": float(to.t_events[0][0])}
    assert abs(out["end"] - decay(p["initial"], p["load"], p["conductance"], p["capacitance"], p["duration"])) < 1e-9
    assert abs(decay(p["initial"], p["load"], p["conductance"], p["capacitance"], out["time_to_lockout"]) - p["lockout"]) < 1e-8
    return out


# Checks

def decay(v, load, g, c, t):
    return v - load * t / c if g == 0 else (v + load / g) * math.exp(-g * t / c) - load / g


def check_balance(p, lanes, out, a, b):
    """What the element brings is what edges and loads take; junction charge leaves as often as it returns."""
    total = sum(q[slot] for q in lanes for slot in SLOTS)
    taken = out["gated"][a:b].sum() + out["recovery"][a:b].sum() + p["load"] * total + p["conductance"] * out["held"][a:b].sum()
    brought = out["recharge"][a:b].sum()
    assert abs(brought - taken) <= 1e-6 * max(abs(taken), abs(brought)) + 1e-10 * p["capacitance"], (p["name"], brought, taken)


def check_switch(p, lanes, v):
    """With a switch a period maps v to s v + r exactly."""
    c, r, load = p["capacitance"], p["element"]["resistance"], p["load"]
    s, x = 1.0, 0.0
    starts = []
    for q in lanes:
        starts.append((s, x))
        ops = [(c / (c + p["charge_per_volt"]), -p["charge"] / (c + p["charge_per_volt"]))] if q["gate"] else []
        for slot in SLOTS:
            if slot == "first" and q["fall"]:
                ops.append((1.0, p["junction_charge"] / c))
            if slot == "rest" and q["rise"]:
                ops.append((1.0, -p["junction_charge"] / c))
            if slot in LOW_SLOTS and q["conducts"][slot] and q[slot] > 0:
                fade = math.exp(-q[slot] / (r * c))
                ops.append((fade, (1 - fade) * (q["drive"][slot] - load * r)))
            else:
                g = p["conductance"] if slot == "on" else 0.0
                low = decay(0.0, load, g, c, q[slot])
                ops.append((decay(1.0, load, g, c, q[slot]) - low, low))
        for f, o in ops:
            s, x = f * s, f * x + o
    first = x / (1 - s)
    worst = max(abs(f * first + o - u) for (f, o), u in zip(starts, v))
    assert worst < 1e-6, (p["name"], worst)
    return worst


def march(p, lanes, v, method="LSODA"):
    """One ring by solve_ivp, interval after interval."""
    d, c = p["element"], p["capacitance"]
    starts = []
    for q in lanes:
        starts.append(v)
        if q["gate"]:
            v = (c * v - p["charge"]) / (c + p["charge_per_volt"])
        for slot in SLOTS:
            if slot == "first" and q["fall"]:
                v += p["junction_charge"] / c
            if slot == "rest" and q["rise"]:
                v -= (p["junction_charge"] + stored(p, q, v)) / c
            t, g = q[slot], p["conductance"] if slot == "on" else 0.0
            if t <= 0:
                continue
            conducts = slot in LOW_SLOTS and q["conducts"][slot]
            rhs = lambda _, y: [((scalar_current(d, q["drive"][slot] - y[0]) if conducts else 0.0) - p["load"] - g * y[0]) * t / c]
            v = float(solve_ivp(rhs, (0, 1), [v], method=method, rtol=1e-10, atol=1e-12).y[0, -1])
    return starts + [v]


def stored(p, q, v):
    """Q_rr of a rise at v."""
    tau = p["recovery_tau"]
    if p["recovery_spec"] <= 0 or p["element"]["switch"]:
        return 0.0
    charge, least, later = 0.0, math.inf, 0.0
    for slot in reversed(LOW_SLOTS):
        if q[slot] <= 0:
            continue
        if not q["conducts"][slot] or v >= q["drive"][slot]:
            break
        least = min(least, scalar_current(p["element"], q["drive"][slot] - v))
        charge += tau * least * (math.exp(-later / tau) - math.exp(-(later + q[slot]) / tau))
        later += q[slot]
    return min(charge, p["recovery_spec"])


def check_integrator():
    """Hold and resistor charge against their exponentials."""
    c, r, load, g = np.array([1e-6, 47e-9]), 22.0, np.array([3e-4, 1e-4]), np.array([1e-4, 0.0])
    t, v = np.array([3e-3, 2e-5]), np.array([12.0, 3.0])
    got = integrate(v, t, np.zeros(2), None, g, load, c, TOLERANCE)[0]
    want = [decay(*x) for x in zip(v, load, g, c, t)]
    assert np.max(np.abs(got - want)) < 1e-9, (got, want)
    resistor = Elements([{"resistance": r, "slope": 0.0, "log_saturation": 0.0, "switch": True}] * 2)
    t = np.array([3e-5, 2e-5])
    got = integrate(v, t, np.full(2, 15.0), resistor, np.zeros(2), load, c, TOLERANCE)[0]
    want = 15 - load * r + (v - 15 + load * r) * np.exp(-t / (r * c))
    assert np.max(np.abs(got - want)) < 1e-8, (got, want)


def check_layout():
    """Periods of 100 us with 1 us of dead time, 10 V, 0.1 ohm, 0.8 V + 0.01 ohm, worked by hand."""
    p = {"name": "by hand", "supply": 10.0, "element": {"switch": False}, "switching_frequency": 1e4, "dead_time": 1e-6, "shortest_pulse": 5e-7,
         "low_side": "MOSFET", "on_resistance": 0.1, "reverse_level": 0.8, "reverse_resistance": 0.01, "output_charge": 1e-6,
         "saturation_level": 1.5, "saturation_resistance": 0.02}
    igbt = {**p, "low_side": "IGBT"}
    for q, d, i, times, drives in (
            (p, 0.4, 2.0, (39, 0.5, 0.5, 59, 1, 0), (10.82, 10.2, 10.82)), (p, 0.4, -2.0, (39, 1, 0, 59, 0, 1), (None, 9.8, None)),
            (p, 0.4, 0.5, (39, 1, 0, 59, 1, 0), (None, 10.05, 10.805)), (p, 1.0, 2.0, (100, 0, 0, 0, 0, 0), (None, None, None)),
            (p, 0.0, 2.0, (0, 0, 0, 100, 0, 0), (None, 10.2, None)), (p, 0.014, -2.0, (0, 0, 0, 100, 0, 0), (None, 9.8, None)),
            (p, 0.986, 2.0, (97.6, 0.5, 1.9, 0, 0, 0), (10.82, None, None)), (p, 0.986, -2.0, (97.6, 2.4, 0, 0, 0, 0), (None, None, None)),
            (igbt, 0.4, 2.0, (39, 0.5, 0.5, 59, 1, 0), (10.82, 10.82, 10.82)), (igbt, 0.4, -2.0, (39, 1, 0, 59, 0, 1), (None, 8.46, None))):
        got = carrier(q, d, i)
        assert np.allclose([1e6 * got[slot] for slot in SLOTS], times, atol=1e-9), (d, i, got)
        assert all(u is None or abs(got["drive"][slot] - u) < 1e-12 for slot, u in zip(LOW_SLOTS, drives)), (d, i, got)
    # at theta = 90 deg, the phase's peak, and at 30 deg, where all three references are known: m sin = m/2, m/2, -m
    for zero, crest, shoulder in (("NONE", 0.9, 0.7), ("THIRD_HARMONIC", 0.5 + 0.4 * 5 / 6, 0.7 + 0.4 / 6), ("MIN_MAX", 0.8, 0.8),
                                  ("CLAMP_60", 1.0, 0.6), ("CLAMP_120_HIGH", 1.0, 1.0), ("CLAMP_120_LOW", 0.6, 0.6)):
        got = duty({"name": zero, "index": 0.8, "zero_sequence": zero}, np.array([np.pi / 2, np.pi / 6]))
        assert np.allclose(got, [crest, shoulder], atol=1e-12), (zero, got)


def check_order(results):
    """How pairs of cases must stand to each other."""
    of = {p["name"]: p["expected"] for p in results}
    motoring, regenerating = of["motoring"], of["regenerating"]
    assert regenerating["low"] < motoring["low"]  # at the crest of the duty no dead time recharges and the node stands above COM
    assert regenerating["low_sourcing"] - regenerating["low"] > motoring["low_sourcing"] - motoring["low"]
    assert all(e["low_sourcing"] is None or e["low_sourcing"] >= e["low"] - 1e-12 for e in of.values() if "low_sourcing" in e)
    assert of["larger resistor"]["low"] < motoring["low"]
    assert of["pull-down, min-max"]["low"] < of["min-max"]["low"]
    assert of["larger resistor, ten times the capacitance"]["low"] > of["larger resistor"]["low"]
    assert of["clamped at standstill"]["low"] < 9.8 < of["clamped at ten times the frequency"]["low"]
    assert of["peak detector"]["high"] > 5.25 - 0.3
    assert of["six-step, low side chopped"]["low_sourcing"] < of["six-step, high side chopped"]["low_sourcing"]


def significant(x):
    if isinstance(x, dict):
        return {key: significant(value) for key, value in x.items()}
    if isinstance(x, list):
        return [significant(value) for value in x]
    return float(f"{x:.11g}") if isinstance(x, float) else x


def main():
    started = time.process_time()
    check_integrator()
    check_layout()
    results = cases()
    assert len({p["name"] for p in results}) == len(results)
    layout = {"sinusoidal": sinusoidal, "sixStep": six_step, "burst": burst}
    ringed = [p for p in results if p["kind"] in layout]
    rings = [layout[p["kind"]](p) for p in ringed]
    for lanes in rings:
        edges(lanes)
    starts, turns = close(ringed, rings)
    ring = Ring(ringed, rings)
    v = np.concatenate(starts)
    out = ring.sweep(v)
    above = ring.sweep(v + 1e-3)
    assert np.all(out["gated"][ring.gate] > 0)
    finer = float(np.max(np.abs(ring.sweep(v, TOLERANCE / 100)["end"] - out["end"])))
    assert finer < 1e-8, finer
    rise = above["end"] - out["end"]
    assert np.all(rise > -1e-9) and np.all(rise[out["slope"] > 1e-5] > 0)  # each map increases
    after = np.concatenate([np.roll(x, -1) for x in starts])
    gap = float(np.max(np.abs(out["end"] - after)))
    assert gap < 1e-9, gap
    lsoda, exact = 0.0, 0.0
    for n, (p, lanes, (a, b)) in enumerate(zip(ringed, rings, ring.spans)):
        check_balance(p, lanes, out, a, b)
        if p["element"]["switch"]:
            exact = max(exact, check_switch(p, lanes, starts[n]))
        if p["name"] in MARCHED:
            lsoda = max(lsoda, float(np.max(np.abs(np.array(march(p, lanes[:48], starts[n][0])) - np.resize(starts[n], len(lanes[:48]) + 1)))))
        if p["name"] == FROM_REST:
            x, count = 0.0, 0
            while True:
                y, count = march(p, lanes, x)[-1], count + 1
                if abs(y - x) < 1e-9:
                    break
                x = y
            lsoda = max(lsoda, abs(y - starts[n][0]))
            print("periodic from rest after", count, file=sys.stderr)
        p["expected"] = periodic(p, lanes, out, a, b)
    assert lsoda < 1e-6, lsoda
    for p in results:
        if p["kind"] == "precharge":
            p["expected"] = precharge(p)
        if p["kind"] == "heldOn":
            p["expected"] = hold(p)
    check_order(results)
    doc = {
        "script": "modulation.py", "python": sys.version.split()[0], "scipy": scipy.__version__, "numpy": np.__version__,
        "method": "multiple shooting, Runge-Kutta 8(5,3) of every period, 1e-10 V a step", "ring_difference": gap, "tolerance_difference": finer,
        "switch_difference": exact, "lsoda_difference": lsoda, "cases": [{**p, "expected": significant(p["expected"])} for p in results],
    }
    pathlib.Path(__file__).with_suffix(".json").write_text(json.dumps(doc, indent=1) + "\n")
    print(len(results), "cases,", ring.size, "periods,", turns, "turns,", round(time.process_time() - started, 1), "s", file=sys.stderr)


MARCHED = ("high fundamental", "high fundamental, clamp 60", "six-step, short low sector", "burst, pre-biased, low enough",
           "recovery, incomplete recharge, motoring", "recovery, incomplete recharge, regenerating", "six-step, both chopped", "peak detector",
           "pull-down, clamp 60", "short pulses vanish, min-max")
FROM_REST = "burst, integrated switch"


if __name__ == "__main__":
    main()
