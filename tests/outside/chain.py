"""The spin chain itself, by brute force on all configurations: no formula of the program is used.

Spectral variable v = -i u. Everything here is floating point (numpy, mpmath).
"""

import itertools

import mpmath as mp
import numpy as np


def sector(length, magnons):
    """All configurations with the given number of flipped spins, and their positions in the list."""
    states = [sum(1 << i for i in c) for c in itertools.combinations(range(length), magnons)]
    return states, {state: i for i, state in enumerate(states)}


def transfer(length, magnons, v):
    """T(v) = tr_0 prod_k (v - 1/2 + P_{0k}) on the sector, as a dense matrix."""
    states, index = sector(length, magnons)
    matrix = np.zeros((len(states), len(states)))
    for column, start in enumerate(states):
        for auxiliary in (0, 1):
            paths = {(auxiliary, 0): 1.0}
            for k in range(length):
                spin = start >> k & 1
                after = {}
                for (a, out), weight in paths.items():
                    stay = (a, out | spin << k)
                    swap = (spin, out | a << k)
                    after[stay] = after.get(stay, 0.0) + weight * (v - 0.5)
                    after[swap] = after.get(swap, 0.0) + weight
                paths = after
            for (a, out), weight in paths.items():
                if a == auxiliary:
                    matrix[index[out], column] += weight
    return matrix


def full_hamiltonian(length):
    """2 sum_k (1 - P_{k,k+1}) on all 2^L configurations."""
    size = 1 << length
    h = np.zeros((size, size))
    for state in range(size):
        for k in range(length):
            n = (k + 1) % length
            a, b = state >> k & 1, state >> n & 1
            if a != b:
                other = state ^ (1 << k) ^ (1 << n)
                h[state, state] += 2
                h[other, state] -= 2
    return h


def primaries(length, magnons):
    """An orthonormal basis of the cyclic highest-weight states of the sector (columns)."""
    states, index = sector(length, magnons)
    above, above_index = sector(length, magnons - 1)
    shift = np.zeros((len(states), len(states)))
    raising = np.zeros((len(above), len(states)))
    full = (1 << length) - 1
    for column, state in enumerate(states):
        moved = (state << 1 | state >> (length - 1)) & full
        shift[index[moved], column] = 1
        for k in range(length):
            if state >> k & 1:
                raising[above_index[state ^ 1 << k], column] += 1
    conditions = np.vstack([shift - np.eye(len(states)), raising])
    _, singular, vectors = np.linalg.svd(conditions)
    rank = int((singular > 1e-9).sum())
    return vectors[rank:].T


def one_loop_states(length, magnons):
    """For each primary: (gamma_1, coefficients of T(v), lowest power first, as complex doubles)."""
    basis = primaries(length, magnons)
    if basis.shape[1] == 0:
        return []
    points = [np.cos(np.pi * (j + 0.5) / (length + 1)) * 1.3 for j in range(length + 1)]
    reduced = [basis.T @ transfer(length, magnons, v) @ basis for v in points]
    generic = sum(np.sin(3 * j + 1) * m for j, m in enumerate(reduced))
    _, vectors = np.linalg.eig(generic)
    inverse = np.linalg.inv(vectors)
    result = []
    for n in range(basis.shape[1]):
        values = [(inverse @ m @ vectors)[n, n] for m in reduced]
        coefficients = np.linalg.solve(np.vander(points, increasing=True).astype(complex), values)
        half = np.polyval(coefficients[::-1], 0.5)
        slope = np.polyval(np.polyder(coefficients[::-1]), 0.5)
        result.append((float((-2 * (slope / half - length)).real), coefficients))
    return sorted(result, key=lambda state: state[0])


def bethe_roots(length, magnons, transfer_coefficients):
    """The roots v_k of the one-loop Baxter polynomial (Baxter equation, least squares), polished to
    working precision with the one-loop Bethe equations. Not for singular states."""
    t = np.array(transfer_coefficients[::-1])

    def image(n):
        one = np.polymul(np.poly1d([1, 0.5]) ** length, np.poly1d([1, -1]) ** n)
        two = np.polymul(np.poly1d([1, -0.5]) ** length, np.poly1d([1, 1]) ** n)
        three = np.polymul(np.poly1d(t), np.poly1d([1, 0]) ** n)
        whole = np.zeros(length + magnons + 1, dtype=complex)
        for sign, p in ((1, one), (1, two), (-1, three)):
            c = np.asarray(p.coeffs if hasattr(p, "coeffs") else p)
            whole[len(whole) - len(c):] += sign * c
        return whole

    matrix = np.array([image(n) for n in range(magnons)]).T
    solution = np.linalg.lstsq(matrix, -image(magnons), rcond=None)[0]
    start = np.roots(np.concatenate([[1], solution[::-1]]))
    return newton(lambda v: one_loop_equations(length, v), [mp.mpc(complex(r)) for r in start])


def one_loop_equations(length, v):
    half = mp.mpf(1) / 2
    out = []
    for k, vk in enumerate(v):
        e = ((vk + half) / (vk - half)) ** length
        for j, vj in enumerate(v):
            if j != k:
                e *= (vk - vj - 1) / (vk - vj + 1)
        out.append(e - 1)
    return out


def newton(equations, start):
    """Newton's method with a numerical Jacobian to working precision."""
    x = mp.matrix(start)
    n = len(start)
    step = mp.mpf(10) ** (-mp.mp.dps // 2)
    for _ in range(60):
        f = mp.matrix(equations(list(x)))
        jacobian = mp.matrix(n, n)
        for j in range(n):
            y = x.copy()
            y[j] += step
            column = (mp.matrix(equations(list(y))) - f) / step
            for i in range(n):
                jacobian[i, j] = column[i]
        d = mp.lu_solve(jacobian, f)
        x -= d
        if mp.norm(d) < mp.mpf(10) ** (-mp.mp.dps + 6):
            return list(x)
    raise ArithmeticError("Newton's method did not converge")
