"""How many modes a block has, where several outputs share one denominator."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import combinations

from flint import fmpq_poly

from specgate.systems.blocks import Block
from specgate.systems.polynomials import least_common_multiple, monic


def block_modes(block: Block) -> fmpq_poly:
    """Return the characteristic polynomial of a block, monic.

    It is the denominator *as written*, once, whatever the number of outputs; unless the minors of the numerators show
    that one set of that many modes cannot do what is written (two separate integrators over the one denominator s):
    then the smallest that can (McMillan 1952).
    """
    return least_common_multiple([block.denominator, *_denominators_of_minors(block)])


def _denominators_of_minors(block: Block) -> Iterator[fmpq_poly]:
    for size in range(2, min(len(block.inputs), len(block.outputs)) + 1):
        for outputs in combinations(block.outputs, size):
            for inputs in combinations(block.inputs, size):
                minor = _minor(block, outputs, inputs)
                power = block.denominator**size
                yield monic(power // power.gcd(minor))


def _minor(block: Block, outputs: tuple[str, ...], inputs: tuple[str, ...]) -> fmpq_poly:
    """Return the determinant of the numerators of some outputs over some inputs, expanded along the first output."""
    if not outputs:
        return fmpq_poly([1])
    total = fmpq_poly()
    for index, name in enumerate(inputs):
        numerator = block.numerators.get((outputs[0], name))
        if numerator:
            rest = _minor(block, outputs[1:], inputs[:index] + inputs[index + 1 :])
            total += numerator * rest * (-1) ** index
    return total
