"""Polynomials in s and the delay operators of one loop: where quasi-polynomials are divided and factored.

All delays of a loop are whole multiples of one, so that its quasi-polynomials are polynomials in s and one symbol
z = e^(-unit s), and exact cancellation is that of polynomials. Where the multiples are large (1 ms beside 0.731 s),
each delay gets a symbol of its own: products, determinants and zeros stay exact, a common factor that needs the ratio
of two delays is not looked for.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from flint import Ordering, fmpq, fmpq_mpoly, fmpq_mpoly_ctx, fmpq_poly

from specgate.systems.quasi import Quasi, common_unit

_MOST = 24
"""Largest multiple of the common unit that shares its symbol."""


class DelayRing:
    """Polynomials in s and the symbols of some delays (s, positive)."""

    def __init__(self, delays: Iterable[fmpq]) -> None:
        self.delays = tuple(sorted(set(delays)))
        self.symbols = self._symbols()
        names = ("s", *(f"z{index}" for index in range(len(self.symbols))))
        self._context = fmpq_mpoly_ctx.get(names, Ordering.lex)
        self.zero: fmpq_mpoly = self._context.from_dict({})
        self.one: fmpq_mpoly = self._context.constant(1)

    def _symbols(self) -> tuple[fmpq, ...]:
        """Return the delay that each symbol stands for."""
        if not self.delays:
            return ()
        unit = common_unit(self.delays)
        return (unit,) if self.delays[-1] / unit <= _MOST else self.delays

    def polynomial(self, polynomial: fmpq_poly) -> fmpq_mpoly:
        """Return a polynomial in s."""
        rest = (0,) * len(self.symbols)
        return self._context.from_dict({(power, *rest): c for power, c in enumerate(polynomial.coeffs()) if c != 0})

    def delay(self, delay: fmpq) -> fmpq_mpoly:
        """Return e^(-delay s) for one of the delays."""
        if len(self.symbols) == 1:
            powers = [int((delay / self.symbols[0]).p)]
        else:
            powers = [int(symbol == delay) for symbol in self.symbols]
        return self._context.from_dict({(0, *powers): 1})

    def quasi(self, element: fmpq_mpoly) -> Quasi:
        """Return an element as a quasi-polynomial."""
        coefficients: dict[fmpq, dict[int, fmpq]] = {}
        for (power, *exponents), factor in element.to_dict().items():
            delay = sum((symbol * count for symbol, count in zip(self.symbols, exponents, strict=True)), fmpq(0))
            of_delay = coefficients.setdefault(delay, {})
            of_delay[power] = of_delay.get(power, fmpq(0)) + factor
        return Quasi.of(
            {
                delay: fmpq_poly([found.get(power, 0) for power in range(max(found) + 1)])
                for delay, found in coefficients.items()
            }
        )

    def determinant(self, matrix: Sequence[Sequence[fmpq_mpoly]]) -> fmpq_mpoly:
        """Return a determinant by fraction-free elimination (Bareiss 1968)."""
        rows, last, sign = [list(row) for row in matrix], self.one, 1
        for column in range(len(rows)):
            pivot = next((index for index in range(column, len(rows)) if rows[index][column]), None)
            if pivot is None:
                return self.zero
            if pivot != column:
                rows[column], rows[pivot], sign = rows[pivot], rows[column], -sign
            head = rows[column]
            for row in rows[column + 1 :]:
                factor = row[column]
                for index in range(column + 1, len(rows)):
                    row[index] = (row[index] * head[column] - factor * head[index]) / last
            last = head[column]
        return last * sign
