"""Circuits at AC against other formulations: tableaus in scipy and mpmath, state equations, differential equations run in time."""

from __future__ import annotations

import cmath
import math
from fractions import Fraction

import mpmath
import numpy as np
import pytest
from circuits import ac, ac_circuits, circuit, part
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_ivp
from scipy.linalg import solve as scipy_solve
from scipy.sparse import coo_matrix
from scipy.sparse.linalg import spsolve

from calccheck.solve import frequencies, solve, total


def polar(magnitude, degrees):
    return cmath.rect(magnitude, math.radians(degrees))


def tableau(made, hertz, number):
    """All node potentials and all currents as unknowns, by an arrangement of the test's own; ``number`` carries the values."""
    w = 2 * mpmath.pi * mpmath.mpf(hertz.numerator) / hertz.denominator
    nodes, names = list(made.nodes()), [e.name for e in made.elements]
    count = len(nodes)
    rows, right = [{} for _ in range(count + len(names))], [number(0)] * (count + len(names))
    for k, e in enumerate(made.elements):
        own, plus, minus = count + k, nodes.index(e.plus), nodes.index(e.minus)
        for at, sign in ((plus, 1), (minus, -1)):
            rows[at][own] = rows[at].get(own, 0) + sign
        acting = (e.frequency or 0) == hertz
        value = None if e.value is None else mpmath.mpf(e.value.numerator) / e.value.denominator
        voltage, current = {
            "resistor": lambda v=value: (1, -v), "inductor": lambda v=value: (1, -1j * w * v),
            "capacitor": lambda v=value: (1j * w * v, -1), "short": lambda: (1, 0), "open": lambda: (0, 1),
            "voltage source": lambda: (1, 0), "controlled voltage source": lambda: (1, 0),
            "current source": lambda: (0, 1), "controlled current source": lambda: (0, 1),
            "impedance": lambda e=e: (1, -mpmath.mpc(e.phasor)),
        }[e.kind]()  # fmt: skip
        terms = [(plus, voltage), (minus, -voltage), (own, current)]
        if e.control is not None:
            c = e.control
            terms += (
                [(count + names.index(c.part), -value)]
                if c.part
                else [(nodes.index(c.plus), -value), (nodes.index(c.minus), value)]
            )
        elif e.kind.endswith("source") and acting:
            right[own] = number(value if e.phasor is None else mpmath.mpc(e.phasor))
        for at, x in terms:
            rows[own][at] = rows[own].get(at, 0) + number(x)
    rows[nodes.index(made.reference)] = {nodes.index(made.reference): number(1)}
    return nodes, rows, right


@settings(max_examples=40, deadline=None)
@given(ac_circuits())
def test_potentials_are_those_of_a_sparse_complex_solver(made):
    hertz = frequencies(made)[-1]
    nodes, rows, right = tableau(made, hertz, complex)
    i, j, x = zip(*[(i, j, x) for i, row in enumerate(rows) for j, x in row.items()], strict=True)
    matrix = coo_matrix((x, (i, j)), dtype=complex).tocsc()
    slack = 1e-15 * np.linalg.cond(matrix.toarray())
    solution = solve(made, hertz)
    for node, v in zip(nodes, spsolve(matrix, np.array(right)), strict=False):
        assert abs(total(solution).potentials[node] - v) <= max(1e-9, slack) * (solution.volts or abs(v) or 1)


@settings(max_examples=10, deadline=None)
@given(ac_circuits("RVILCZ", most_nodes=5, most_extra=4))
def test_phasors_against_fifty_digits(made):
    """Both routes, against Gaussian elimination in mpmath where 2πf is worked to fifty digits as well."""
    hertz = frequencies(made)[-1]
    solution = solve(made, hertz)
    with mpmath.workdps(50):
        nodes, rows, right = tableau(made, hertz, mpmath.mpc)
        matrix = mpmath.matrix(len(rows))
        for i, row in enumerate(rows):
            for j, x in row.items():
                matrix[i, j] = x
        solved = mpmath.lu_solve(matrix, mpmath.matrix(right))
        for k, node in enumerate(nodes):
            for at in (solution.nodal, total(solution)):
                assert abs(mpmath.mpc(at.potentials[node]) - solved[k]) <= 1e-9 * solution.volts


@settings(max_examples=15, deadline=None)
@given(st.lists(st.tuples(st.integers(1, 99), st.integers(1, 99)), min_size=1, max_size=5), st.integers(1, 5000))
def test_ladders_of_rc_against_the_state_equations(rungs, hertz):
    """Resistors in line and capacitors across: C·dv/dt = G·v + g·u, whose phasors are (jωC − G)⁻¹·g, worked by scipy."""
    ohms, farads = [100.0 * r for r, _ in rungs], [1e-8 * c for _, c in rungs]
    n = len(rungs)
    g = np.zeros((n, n))
    for k, r in enumerate(ohms):
        g[k, k] -= 1 / r
        if k:
            g[k - 1, k - 1] -= 1 / r
            g[k - 1, k] = g[k, k - 1] = 1 / r
    fed = np.array([1 / ohms[0]] + [0.0] * (n - 1))
    expected = scipy_solve(2j * math.pi * hertz * np.diag(farads) - g, fed)
    parts = [part("R", f"R{k}", f"n{k}", f"n{k + 1}", 100 * r) for k, (r, _) in enumerate(rungs)]
    parts += [part("C", f"C{k}", f"n{k + 1}", "com", Fraction(c, 10**8)) for k, (_, c) in enumerate(rungs)]
    at = total(solve(circuit(ac("V", "V1", "n0", "com", 1, hertz), *parts), Fraction(hertz)))
    assert [at.potentials[f"n{k + 1}"] for k in range(n)] == pytest.approx(list(expected), rel=1e-9)


def test_phasors_are_what_is_left_of_the_differential_equations():
    """Amplitude 10 V at 30° on 5 Ω, 2 mH and 40 µF, 1 kHz: L·di/dt = u − R·i − v, C·dv/dt = i run to their steady state by scipy."""
    ohms, henries, farads, w, drive = 5.0, 2e-3, 40e-6, 2000 * math.pi, polar(10, 30)

    def slopes(t, x):
        u = (drive * cmath.exp(1j * w * t)).real
        return [(u - ohms * x[0] - x[1]) / henries, x[0] / farads]

    seen = np.linspace(0.02, 0.021, 200)
    run = solve_ivp(slopes, (0, 0.021), [0, 0], t_eval=seen, rtol=1e-9, atol=1e-12)
    made = circuit(ac("V", "V1", "a", "com", drive, 1000), part("R", "R1", "a", "b", 5), part("L", "L1", "b", "c", "2e-3"),
                   part("C", "C1", "c", "com", "40e-6"))  # fmt: skip
    at = total(solve(made, Fraction(1000)))
    turning = np.exp(1j * w * seen)
    assert run.y[0] == pytest.approx((at.currents["L1"] * turning).real, abs=1e-6)
    assert run.y[1] == pytest.approx((at.potentials["c"] * turning).real, abs=1e-5)
