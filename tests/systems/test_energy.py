"""The integral of a squared impulse response: against printed formulas, Lyapunov's equation, and quadrature."""

from __future__ import annotations

import random

import pytest
from flint import fmpq, fmpq_mat, fmpq_poly

from specgate.systems.energy import energy
from specgate.systems.polynomials import product


def test_against_the_printed_table() -> None:
    """I_1 to I_3 of G. C. Newton, L. A. Gould, J. F. Kaiser 1957, appendix E, for (c0 + c1 s ...)/(d0 + d1 s ...)."""
    c0, c1, c2 = fmpq(3), fmpq(-2, 7), fmpq(5, 3)
    d0, d1, d2, d3 = fmpq(2), fmpq(11), fmpq(7), fmpq(1, 2)
    assert energy(fmpq_poly([c0]), fmpq_poly([d0, d1])) == c0**2 / (2 * d0 * d1)
    second = (c1**2 * d0 + c0**2 * d2) / (2 * d0 * d1 * d2)
    assert energy(fmpq_poly([c0, c1]), fmpq_poly([d0, d1, d2])) == second
    third = (c2**2 * d0 * d1 + (c1**2 - 2 * c0 * c2) * d0 * d3 + c0**2 * d2 * d3) / (2 * d0 * d3 * (d1 * d2 - d0 * d3))
    assert energy(fmpq_poly([c0, c1, c2]), fmpq_poly([d0, d1, d2, d3])) == third


@pytest.mark.parametrize("seed", range(6))
def test_against_lyapunovs_equation(seed: int) -> None:
    """A'X + X A + c'c = 0 for the companion form, solved as a linear system; the integral is b'X b."""
    choose = random.Random(seed)
    factors = [fmpq_poly([fmpq(choose.randint(1, 10**4), 100), 1]) for _ in range(choose.randint(1, 3))]
    factors += [
        fmpq_poly([fmpq(choose.randint(1, 900), 10), fmpq(choose.randint(1, 50), 10 ** choose.randint(1, 4)), 1])
        for _ in range(choose.randint(0, 2))
    ]
    denominator = product(factors)
    n = denominator.degree()
    numerator = fmpq_poly([fmpq(choose.randint(-50, 50), 7) for _ in range(n)])
    rows = [[fmpq(int(j == i + 1)) for j in range(n)] for i in range(n - 1)]
    rows.append([-denominator[j] for j in range(n)])
    system = fmpq_mat(n * n, n * n, [fmpq(0)] * (n**4))
    for i in range(n):
        for j in range(n):
            for k in range(n):
                system[i * n + j, k * n + j] += rows[k][i]
                system[i * n + j, i * n + k] += rows[k][j]
    right = fmpq_mat(n * n, 1, [-numerator[i] * numerator[j] for i in range(n) for j in range(n)])
    assert energy(numerator, denominator) == system.solve(right)[n * n - 1, 0]


def test_what_has_no_finite_integral_is_refused() -> None:
    for denominator in (fmpq_poly([0, 1]), fmpq_poly([1, 0, 1]), fmpq_poly([-1, 1])):
        with pytest.raises(ValueError, match="no finite integral"):
            energy(fmpq_poly([1]), denominator)
    with pytest.raises(ValueError, match="no finite integral"):
        energy(fmpq_poly([1, 1]), fmpq_poly([1, 2]))
    assert energy(fmpq_poly([0]), fmpq_poly([1, 2])) == 0
