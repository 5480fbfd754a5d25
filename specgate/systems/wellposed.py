"""Whether the equations of a wiring determine its signals."""

from __future__ import annotations

from flint import fmpz_poly

from specgate.systems.feedthrough import AlgebraicLoop, differentiating_loop, undetermined
from specgate.systems.network import Network


def algebraic_loop(network: Network) -> AlgebraicLoop | None:
    """Return the first algebraic loop of a wiring, None if it is well posed."""
    found = undetermined(network.equations)
    if found is not None:
        return found
    # The elimination stops at a singular block: its determinant is zero.
    determinants = (*network.triangle.determinants, fmpz_poly())
    for block, determinant in zip(network.blocks, determinants, strict=False):
        found = differentiating_loop(network.equations, block, determinant)
        if found is not None:
            return found
    return None
