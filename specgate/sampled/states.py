"""The state of a sampled loop at its samples, in balls, from a first sample on."""

from __future__ import annotations

from flint import arb_mat

from specgate.terms.precision import working_precision

_BLOCK = 64


class States:
    """x[k] = M^k x[0] at one precision.

    Products of a matrix of balls with a vector of balls, one after the other, widen with every step by the norm of the
    matrix, whatever its eigenvalues are. So only up to a block of steps is taken one by one; the steps over a block are
    taken with the power of the matrix, which is squared and widens with its own norm.
    """

    def __init__(self, matrix: arb_mat, first: arb_mat, bits: int) -> None:
        self._bits = bits
        self._powers = [matrix]
        self._heads = [first]
        self._blocks: dict[int, list[arb_mat]] = {}

    def power(self, exponent: int) -> arb_mat:
        """Return M^(2^exponent)."""
        with working_precision(self._bits):
            while len(self._powers) <= exponent:
                self._powers.append(self._powers[-1] * self._powers[-1])
        return self._powers[exponent]

    def at(self, index: int) -> arb_mat:
        """Return x[index], with all before it in its block kept."""
        number, offset = divmod(index, _BLOCK)
        with working_precision(self._bits):
            while len(self._heads) <= number:
                self._heads.append(self.power(_BLOCK.bit_length() - 1) * self._heads[-1])
            block = self._blocks.setdefault(number, [self._heads[number]])
            while len(block) <= offset:
                block.append(self._powers[0] * block[-1])
        return block[offset]

    def far(self, index: int) -> arb_mat:
        """Return x[index] by squares alone, and keep nothing."""
        state = self._heads[0]
        with working_precision(self._bits):
            for exponent in range(index.bit_length()):
                if index >> exponent & 1:
                    state = self.power(exponent) * state
        return state
