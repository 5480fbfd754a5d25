"""How many modes a block has, where several outputs share one denominator."""

from __future__ import annotations

from flint import fmpq_poly

from specgate.systems.blocks import Block
from specgate.systems.minimal import shown_modes
from specgate.systems.polynomials import least_common_multiple, monic
from specgate.systems.transfer import TransferFunction


def block_modes(block: Block) -> fmpq_poly:
    """Return the characteristic polynomial of a block, monic.

    It is the denominator *as written*, once, whatever the number of outputs; unless one set of that many modes cannot
    do what is written (two separate integrators over the one denominator s): then the smallest set that can is added.
    """
    if len(block.inputs) == 1 or len(block.outputs) == 1:
        return monic(block.denominator)
    zero = fmpq_poly()
    matrix = [
        [
            TransferFunction(block.numerators.get((output, name), zero), block.denominator).reduced()
            for name in block.inputs
        ]
        for output in block.outputs
    ]
    return least_common_multiple([block.denominator, shown_modes(matrix)])
