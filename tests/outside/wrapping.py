"""The leading finite-size term as a numerical integral and sum, against the exact value.

  - sum_{a>=1} int du/pi T_a^2 / [(u^2 + a^2/4)^L q_{a+1} q_{a-1} q_{1-a} q_{-a-1}],  q_k = Q(-i u + k/2)
(arXiv:0807.0399). Q comes from diagonalising the chain by brute force. Each integral by tanh-sinh
quadrature; the sum over a by a Levin transformation, whose last changes are the stated error.
"""

import sys

import mpmath as mp

import chain
import record

program = sys.argv[1]
mp.mp.dps = 24
TERMS = 20


def integrand(length, roots, a, u):
    v = mp.mpc(0, -1) * u

    def q(k):
        value = mp.mpc(1)
        for r in roots:
            value *= v + mp.mpf(k) / 2 - r
        return value

    pp, pm, qp, mm = q(a + 1), q(a - 1), q(1 - a), q(-a - 1)
    t = (a + 1) * pm * qp - a * pp * qp - a * mm * pm + (a - 1) * pp * mm
    return t * t / ((u * u + mp.mpf(a * a) / 4) ** length * pp * pm * qp * mm)


def summand(length, roots, a):
    """The contour keeps the zeros of q_{1-a}, q_{-a-1} on one side and those of q_{a-1}, q_{a+1} on
    the other, as it does for real Bethe roots; for complex roots some lie across the real line.
    It is a line Im u = shift, and the residues of the poles that this leaves on the wrong side."""
    bethe = [mp.mpc(0, 1) * r for r in roots]
    above = [u + mp.mpc(0, k) / 2 for u in bethe for k in ((a - 1, a + 1) if a > 1 else (a + 1,))]
    below = [u - mp.mpc(0, k) / 2 for u in bethe for k in ((a - 1, a + 1) if a > 1 else (a + 1,))]
    shifts = [mp.mpf(n) / 16 for n in range(-7, 8)]
    shift = max(shifts, key=lambda s: min(abs(mp.im(u) - s) for u in above + below) - abs(s) / 100)
    line = lambda t: integrand(length, roots, a, mp.mpc(t, shift))
    value = mp.quad(line, [-mp.inf, -8 * a, -a, 0, a, 8 * a, mp.inf])
    for pole in above + below:
        wrong = mp.im(pole) < shift if pole in above else mp.im(pole) > shift
        if wrong:
            residue = circle(lambda u: integrand(length, roots, a, u), pole, above + below)
            value += mp.mpc(0, 2) * mp.pi * residue * (1 if pole in above else -1)
    return -mp.re(value) / mp.pi


def circle(f, pole, poles):
    """Residue by the trapezoidal rule on a circle (its error falls geometrically)."""
    radius = min([abs(p - pole) for p in poles if abs(p - pole) > 1e-12] + [mp.mpf(1) / 2]) / 3
    points = 96
    steps = [radius * mp.expjpi(2 * mp.mpf(n) / points) for n in range(points)]
    return sum(f(pole + s) * s for s in steps) / points


def total(length, roots):
    terms = [summand(length, roots, a) for a in range(1, TERMS + 1)]
    estimates = []
    for count in (TERMS - 2, TERMS - 1, TERMS):
        estimates.append(mp.levin(method="levin", variant="u").update(terms[:count])[0])
    error = max(abs(estimates[2] - estimates[1]), abs(estimates[1] - estimates[0])) * 10
    return estimates[2], error + abs(estimates[2]) * mp.mpf(10) ** -18


for length, magnons, limit in ((4, 2, 9), (5, 2, 9), (6, 2, 9), (7, 3, 9), (8, 4, 9)):
    data = record.load(program, length, magnons)
    brute = chain.one_loop_states(length, magnons)
    for orbit, omega, one_loop in record.states(data):
        if orbit["singular"]:
            continue
        _, transfer = min(brute, key=lambda state: abs(state[0] - float(one_loop)))
        roots = chain.bethe_roots(length, magnons, transfer)
        coefficient = next(c for c in orbit["coefficients"] if c["loop"] == length)
        exact = record.evaluate(coefficient["parts"]["finite_size"], omega)
        value, error = total(length, roots)
        record.check(
            abs(value - exact) <= error and error < abs(exact) * mp.mpf(10) ** -limit,
            f"({length}, {magnons}) gamma_1 = {mp.nstr(one_loop, 8)}: integral {mp.nstr(value, 15)} +- {mp.nstr(error, 2)}, "
            f"exact {mp.nstr(exact, 15)}",
        )
record.finish()
