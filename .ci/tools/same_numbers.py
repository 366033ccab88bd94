#!/usr/bin/env python3
"""Compares two JSON documents: numbers within a tolerance, all else exactly.

    same_numbers.py COMMITTED COMPUTED

Numbers agree when they differ by at most 1e-6 of the larger magnitude. Inside
an array of numbers the largest magnitude of the array counts, so that a point
where a curve crosses zero is held to the curve's scale. An object may say by
"agreement", {beginning of a name: difference}, by how much numbers of such names
in it may differ all the same; the longest beginning counts. What tells how a
document was made is not compared: the versions under "python", "scipy" and
"numpy", and residuals, the numbers whose key has "difference" in it. Every
difference is printed with its path; any difference makes the exit status 1.
"""
import json
import math
import sys

TOLERANCE = 1e-6
VERSIONS = {"python", "scipy", "numpy"}


def is_number(value):
    return isinstance(value, (int, float)) and not isinstance(value, bool)


def agree(want, got, scale):
    if not (math.isfinite(want) and math.isfinite(got)):
        return repr(want) == repr(got)
    return abs(want - got) <= TOLERANCE * scale


def provenance(key, value):
    return key in VERSIONS or ("difference" in key and is_number(value))


def allowed(name, agreement):
    fitting = [k for k in agreement if name.startswith(k)]
    return agreement[max(fitting, key=len)] if fitting else 0.0


def differences(want, got, path="$", agreement={}, name=""):
    if is_number(want) and is_number(got):
        if not agree(want, got, max(abs(want), abs(got))) and not abs(want - got) <= allowed(name, agreement):
            yield f"{path}: {want!r} committed, {got!r} computed"
    elif isinstance(want, list) and isinstance(got, list):
        if len(want) != len(got):
            yield f"{path}: {len(want)} elements committed, {len(got)} computed"
        elif want and all(map(is_number, want + got)):
            scale = max(map(abs, want + got))
            for i, (a, b) in enumerate(zip(want, got)):
                if not agree(a, b, scale):
                    yield f"{path}[{i}]: {a!r} committed, {b!r} computed"
        else:
            for i, (a, b) in enumerate(zip(want, got)):
                yield from differences(a, b, f"{path}[{i}]", agreement, name)
    elif isinstance(want, dict) and isinstance(got, dict):
        agreement = want.get("agreement", agreement)
        for key in sorted(want.keys() | got.keys()):
            if key not in got:
                yield f"{path}.{key}: committed only"
            elif key not in want:
                yield f"{path}.{key}: computed only"
            elif not (provenance(key, want[key]) and provenance(key, got[key])):
                yield from differences(want[key], got[key], f"{path}.{key}", agreement, key)
    elif type(want) is not type(got) or want != got:
        yield f"{path}: {want!r} committed, {got!r} computed"


def main(committed, computed):
    with open(committed, encoding="utf-8") as a, open(computed, encoding="utf-8") as b:
        found = list(differences(json.load(a), json.load(b)))
    for line in found:
        print(f"{committed}: {line}")
    return 1 if found else 0


if __name__ == "__main__":
    if len(sys.argv) != 3:
        sys.exit(__doc__)
    sys.exit(main(sys.argv[1], sys.argv[2]))
