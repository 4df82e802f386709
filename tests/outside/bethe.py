"""The long-range Bethe equations solved numerically at small coupling, against the exact series.

In the usual variables: x + 1/x = u/g, u = i v, charges q_r = i/(r-1) (x_+^{1-r} - x_-^{1-r}), and
the dressing phase theta = sum c_rs(g) [q_r q_s' - q_s q_r'] with c_rs as an integral over Bessel
functions (hep-th/0610251; the integral form, not the zeta series the program uses):
  c_rs = 2 cos(pi (s-r-1)/2) (r-1)(s-1) int_0^oo dt J_{r-1}(2gt) J_{s-1}(2gt) / (t (e^t - 1)).
The difference to the series through h^L (the asymptotic part at h^L) must shrink like h^{L+1}.
"""

import sys

import mpmath as mp

import chain
import record

program = sys.argv[1]
mp.mp.dps = 45


def dressing(g, top):
    table = {}
    for r in range(2, top):
        for s in range(r + 1, top + 2, 2):
            if r + s > top + 1:
                continue
            sign = mp.mpf((-1) ** ((s - r - 1) // 2))
            integrand = lambda t: mp.besselj(r - 1, 2 * g * t) * mp.besselj(s - 1, 2 * g * t) / (t * mp.expm1(t))
            table[r, s] = 2 * sign * (r - 1) * (s - 1) * mp.quad(integrand, [0, 2, 8, 20, 50, 110])
    return table


def x_of(u, g):
    w = u / g
    root = mp.sqrt(w - 2) * mp.sqrt(w + 2)
    return (w + root) / 2


def equations(length, u, g, table):
    plus = [x_of(uk + mp.mpc(0, 0.5), g) for uk in u]
    minus = [x_of(uk - mp.mpc(0, 0.5), g) for uk in u]
    orders = sorted({r for pair in table for r in pair})
    q = [{r: mp.mpc(0, 1) / (r - 1) * (p ** (1 - r) - m ** (1 - r)) for r in orders} for p, m in zip(plus, minus)]
    out = []
    for k in range(len(u)):
        e = (plus[k] / minus[k]) ** length
        theta = 0
        for j in range(len(u)):
            if j != k:
                e *= (u[k] - u[j] - mp.mpc(0, 1)) / (u[k] - u[j] + mp.mpc(0, 1))
                theta += sum(c * (q[k][r] * q[j][s] - q[k][s] * q[j][r]) for (r, s), c in table.items())
        out.append(e * mp.exp(mp.mpc(0, -2) * theta) - 1)
    energy = mp.mpc(0, 2) * g * sum(1 / p - 1 / m for p, m in zip(plus, minus))
    return out, energy


for length, magnons in ((4, 2), (6, 2), (7, 3), (8, 4)):
    data = record.load(program, length, magnons)
    brute = chain.one_loop_states(length, magnons)
    couplings = [mp.mpf(1) / 1000, mp.mpf(1) / 2000, mp.mpf(1) / 4000]
    tables = [dressing(mp.sqrt(h), length + 3) for h in couplings]
    for orbit, omega, one_loop in record.states(data):
        if orbit["singular"]:
            continue
        _, transfer = min(brute, key=lambda state: abs(state[0] - float(one_loop)))
        roots = chain.bethe_roots(length, magnons, transfer)
        u = [mp.mpc(0, 1) * v for v in roots]
        errors = []
        for h, table in zip(couplings, tables):
            g = mp.sqrt(h)
            u = chain.newton(lambda w: equations(length, w, g, table)[0], u)
            energy = equations(length, u, g, table)[1]
            series = mp.mpf(0)
            for coefficient in orbit["coefficients"]:
                n = coefficient["loop"]
                if n <= length:
                    terms = coefficient["parts"]["asymptotic"] if "parts" in coefficient else coefficient["terms"]
                    series += record.evaluate(terms, omega) * h**n
            errors.append(abs(energy - series))
        orders = [mp.log(a / b, 2) for a, b in zip(errors, errors[1:])]
        record.check(
            errors[0] < mp.mpf(10) ** (-2 * length - 1) and abs(orders[-1] - (length + 1)) < 0.1,
            f"({length}, {magnons}) gamma_1 = {mp.nstr(one_loop, 8)}: error {mp.nstr(errors[0], 3)} at h = 1/1000, "
            f"falling like h^{mp.nstr(orders[0], 4)}, h^{mp.nstr(orders[1], 5)} (expected h^{length + 1})",
        )
record.finish()
