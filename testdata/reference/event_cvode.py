#!/usr/bin/python3
"""Checks event_cvode.c against event.json and shows what CVODE takes for an error of 0.5 % in every extreme.

Error     |extreme - reference| over the larger of |reference| and 2 % of the bus; a case's error is the largest over the thirteen extremes.
Prints    agreement at rtol 1e-9 (largest difference over the bus voltage, at most 1e-4, else exit 1); for each case the loosest rtol within
          0.5 %, its steps, right-hand sides, processor time and error, and the loosest rtol from which on all tighter ones are within 0.5 %
          as well (the first may be luck) with its time; medians, worst and sums; error and time of each rtol over all cases.

Run: /usr/bin/python3 event_cvode.py [--input] [--sundials PREFIX] [event_cvode's options]
     --input writes the flat input and nothing else; --sundials: an optimised build to measure with (see event_cvode.c), else gcc finds
     libsundials-dev, whose times mean nothing
"""
import json
import pathlib
import statistics
import subprocess
import sys
import tempfile

HERE = pathlib.Path(__file__).parent
SCALARS = ["bus", "load", "vdd", "drive2_on", "l1", "l2", "r1", "r2", "common_source1", "common_source2", "node_resistor", "pin_capacitance",
           "bootstrap_capacitance", "t_end"]
SWITCH = ["c_gs", "gate_resistance", "off_bias", "transconductance", "threshold", "on_resistance"]
STATES = ["i1", "i2", "v_gs1", "v_ds1", "v_gs2", "v_ds2", "v_pin", "v_bs", "q_m1", "q_m2", "i_lfr1", "i_lfr2"]
FLAGS = ["-O2"]
LIBRARIES = ["-lsundials_cvode", "-lsundials_nvecserial", "-lm"]
LIMIT, AGREE = 5e-3, 1e-4


def flat(case):
    """The case as event_cvode.c reads it."""
    p = case["input"]
    out = [("name", case["name"]), ("event", p["event"])] + [(k, p[k]) for k in SCALARS]
    out.append(("ringing_resistance", p["ringing_resistance"] or 0.0))
    for key in ("bootstrap", "clamp"):
        if p[key]:
            out.append((key, *(p[key][k] for k in ("nvt", "ln_is", "resistance"))))
    for side in ("high", "low"):
        s = p[side]
        r = s["reverse"]
        out += [(side + ".kind", s["kind"])] + [(f"{side}.{k}", s[k]) for k in SWITCH]
        out += [(f"{side}.{k}", *(x for point in s[k] for x in point)) for k in ("c_oss", "c_rss")]
        out.append((side + ".reverse", r["nvt"], r["ln_is"], r["resistance"], r["offset"], int(r["offset_follows_gate"])))
        if r["recovery"]:
            out.append((side + ".recovery", r["recovery"]["tau"], r["recovery"]["transit"]))
        if r["forward_recovery"]:
            out.append((side + ".forward_recovery", r["forward_recovery"]["inductance"], r["forward_recovery"]["resistance"]))
    out += [("start", *(case["start"][k] for k in STATES)), ("run",)]
    return "".join(" ".join(map(str, line)) + "\n" for line in out)


def runs(program, text, args):
    """The program's lines as {name: [row, ...]}, numbers as numbers."""
    lines = subprocess.run([program, *args], input=text, capture_output=True, text=True, check=True).stdout.splitlines()
    head, out = lines[0].split("\t"), {}
    for line in lines[1:]:
        name, *values = line.split("\t")
        out.setdefault(name, []).append(dict(zip(head[1:], map(float, values))))
    return out, head[7:]


def error(case, row, extremes):
    """The largest error and the extreme that has it."""
    if row["flag"]:
        return float("inf"), "flag"
    return max((abs(row[k] - case["result"][k]) / max(abs(case["result"][k]), 0.02 * case["input"]["bus"]), k) for k in extremes)


def main():
    args = sys.argv[1:]
    cases = json.loads((HERE / "event.json").read_text())["cases"]
    text = "".join(map(flat, cases))
    if "--input" in args:
        sys.stdout.write(text)
        return
    flags = FLAGS
    if "--sundials" in args:
        n = args.index("--sundials")
        flags = FLAGS + ["-I", args[n + 1] + "/include", "-L", args[n + 1] + "/lib"]
        del args[n : n + 2]
    with tempfile.TemporaryDirectory() as d:
        program = d + "/event_cvode"
        subprocess.run(["gcc", str(HERE / "event_cvode.c"), *flags, "-o", program, *LIBRARIES], check=True)
        tight, extremes = runs(program, text, ["-m", "0", "1e-9"])
        loose, _ = runs(program, text, args)

    worst = max((abs(tight[c["name"]][0][k] - c["result"][k]) / c["input"]["bus"], k, c["name"]) for c in cases for k in extremes)
    bad = [n for n, rows in tight.items() if rows[0]["flag"]]
    print(f"rtol 1e-9: {len(cases)} cases, {len(extremes)} extremes each, largest difference {worst[0]:.2g} of the bus ({worst[1]}, {worst[2]})", *bad)

    first, kept = [], []
    print(f"{'case':90s} {'rtol':>6s} {'steps':>5s} {'rhs':>5s} {'us':>8s} {'error':>7s} {'worst at':12s} {'kept from':>9s} {'us':>8s}")
    for c in cases:
        rows = loose[c["name"]]
        errors = [error(c, row, extremes) for row in rows]
        at = next((n for n, e in enumerate(errors) if e[0] <= LIMIT), None)
        if at is None or errors[-1][0] > LIMIT:
            print(f"{c['name']:90s} none within {LIMIT:g}, or not the last")
            bad.append(c["name"])
            continue
        stay = next((n + 1 for n in range(len(errors) - 1, -1, -1) if errors[n][0] > LIMIT), 0)
        row, (e, k) = rows[at], errors[at]
        first.append(row | {"error": e})
        kept.append(rows[stay] | {"error": errors[stay][0]})
        print(f"{c['name']:90s} {row['rtol']:6g} {row['steps']:5.0f} {row['rhs']:5.0f} {row['us']:8.1f} {100 * e:6.3f}% {k:12s} {rows[stay]['rtol']:9g} {rows[stay]['us']:8.1f}")
    for title, found in (("loosest", first), ("kept", kept)):
        for k in ("us", "steps", "rhs", "error"):
            v = [r[k] for r in found]
            print(f"{title:8s} {k:6s} median {statistics.median(v):.4g} worst {max(v):.4g} sum {sum(v):.4g}")
    for n, row in enumerate(loose[cases[0]["name"]]):
        rows = [loose[c["name"]][n] for c in cases]
        v = [error(c, r, extremes)[0] for c, r in zip(cases, rows)]
        us = [r["us"] for r in rows]
        print(f"rtol {row['rtol']:6g}: error median {statistics.median(v):.2g} worst {max(v):.2g}, us median {statistics.median(us):.1f} worst {max(us):.1f}")
    if bad or worst[0] > AGREE:
        sys.exit(1)


if __name__ == "__main__":
    main()
