"""One-loop spectrum by brute force on the chain with 2^L configurations (numpy).

Every gamma_1 of every record must be among the eigenvalues of the full Hamiltonian, and the primaries
found by brute force must be exactly those of the records, as often as they occur.
"""

import sys

import mpmath as mp
import numpy as np

import chain
import record

program = sys.argv[1]
mp.mp.dps = 30
for length in range(4, 10):
    everything = np.linalg.eigvalsh(chain.full_hamiltonian(length))
    for magnons in range(2, length // 2 + 1):
        data = record.load(program, length, magnons)
        expected = []
        for orbit, omega, one_loop in record.states(data):
            expected += [float(one_loop)] * (2 if orbit["parity"] == "paired" else 1)
        expected.sort()
        found = [gamma for gamma, _ in chain.one_loop_states(length, magnons)]
        same = len(found) == len(expected) == data["primaries"]
        distance = max((abs(a - b) for a, b in zip(found, expected)), default=0.0) if same else float("inf")
        inside = max((np.abs(everything - gamma).min() for gamma in expected), default=0.0)
        record.check(
            same and distance < 1e-8 and inside < 1e-9,
            f"({length}, {magnons}): {len(expected)} primaries, largest deviation {distance:.1e}, from the full chain {inside:.1e}",
        )
record.finish()
