"""The state of a sampled loop at its samples, in balls, from a first sample on."""

from __future__ import annotations

from flint import arb_mat

from specgate.terms.precision import working_precision

_BLOCK = 64
_FEW = 8


class States:
    """x[k] = M^k x[0] at one precision.

    Products of a matrix of balls with a vector of balls, one after the other, widen with every step by the norm of the
    matrix, whatever its eigenvalues are. So no state is made from the one before it: squares of the matrix widen with
    their own norms, which fall where the loop is stable, and a power takes only as many products as k has bits.
    """

    def __init__(self, matrix: arb_mat, first: arb_mat, bits: int) -> None:
        self._bits = bits
        self._squares = [matrix]
        self._first = first
        self._heads: dict[int, arb_mat] = {}
        self._powers: dict[int, arb_mat] = {}

    def power(self, exponent: int) -> arb_mat:
        """Return M^(2^exponent)."""
        with working_precision(self._bits):
            while len(self._squares) <= exponent:
                self._squares.append(self._squares[-1] * self._squares[-1])
        return self._squares[exponent]

    def at(self, index: int) -> arb_mat:
        """Return x[index]; the first of every block of samples is kept, and the powers within a block."""
        number, offset = divmod(index, _BLOCK)
        if number not in self._heads:
            self._heads[number] = self.far(number * _BLOCK)
        state = self._heads[number]
        with working_precision(self._bits):
            for power in (offset - offset % _FEW, offset % _FEW):
                state = self._within(power) * state if power else state
        return state

    def _within(self, offset: int) -> arb_mat:
        """Return M^offset, offset > 0."""
        if offset not in self._powers:
            top = offset.bit_length() - 1
            rest = offset - (1 << top)
            with working_precision(self._bits):
                self._powers[offset] = self.power(top) * self._within(rest) if rest else self.power(top)
        return self._powers[offset]

    def far(self, index: int) -> arb_mat:
        """Return x[index] by squares alone, and keep nothing."""
        state = self._first
        with working_precision(self._bits):
            for exponent in range(index.bit_length()):
                if index >> exponent & 1:
                    state = self.power(exponent) * state
        return state
