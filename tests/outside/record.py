"""Records as printed by `loopladder series L M --format json`, and their numbers."""

import json
import subprocess
import sys
from fractions import Fraction

import mpmath as mp


def load(program, length, magnons):
    output = subprocess.run(
        [program, "series", str(length), str(magnons), "--format", "json"], check=True, capture_output=True, text=True
    )
    return json.loads(output.stdout)


def number(text):
    value = Fraction(text)
    return mp.mpf(value.numerator) / value.denominator


def omegas(orbit):
    """The real roots of the minimal polynomial, ascending."""
    coefficients = [number(c) for c in reversed(orbit["minimal_polynomial"])]
    if len(coefficients) == 2:
        return [-coefficients[1] / coefficients[0]]
    with mp.workdps(mp.mp.dps + 40):
        roots = mp.polyroots(coefficients, maxsteps=2000, extraprec=2000)
    return sorted(mp.re(r) for r in roots)


def evaluate(terms, omega):
    total = mp.mpf(0)
    for term in terms:
        product = mp.mpf(1)
        for k in term["zeta"]:
            product *= mp.zeta(k)
        total += product * mp.polyval([number(c) for c in reversed(term["value"])], omega)
    return total


def states(record):
    """(orbit, omega, gamma_1) for every embedding of every orbit."""
    for orbit in record["orbits"]:
        for omega in omegas(orbit):
            first = next(c for c in orbit["coefficients"] if c["loop"] == 1)
            yield orbit, omega, evaluate(first["terms"], omega)


failures = []


def check(good, message):
    print(("ok      " if good else "FAILED  ") + message, flush=True)
    if not good:
        failures.append(message)


def finish():
    sys.exit(1 if failures else 0)
