"""The grid of a response: floats where they are sharp, Taylor panels where the modes cancel too far for them."""

from __future__ import annotations

import numpy as np

from specgate.response.deviation import Modal
from specgate.response.grid import Block
from specgate.response.layout import FloatLayout
from specgate.response.panels import PanelLayout

CANCELLING = 1e-3
"""Size of the response, in units of the sum of the modes, from which on floats are sharp everywhere."""

_SHARP = 1e-8
"""Error of samples, in parts of the largest of them, up to which floats are sharp."""

_LOOKS = np.arange(1.0, 2.0, 0.125)


class MixedLayout:
    """Plans each block by what floats resolve of the octave that it begins with.

    reach: the size of the response, in units of the sum of its modes.
    """

    def __init__(self, deviation: Modal, first: float, resolution: float, reach: float) -> None:
        self._deviation = deviation
        self._clear = reach > CANCELLING
        self._first = first
        self._floats = FloatLayout(deviation, first, resolution)
        self._panels = PanelLayout(deviation, first, resolution)

    def block(self, before: list[Block]) -> Block:
        """Return the block that follows."""
        left = before[-1].end if before else self._first
        layout = self._floats if self._sharp(left) else self._panels
        return layout.block(before)

    def _sharp(self, left: float) -> bool:
        if self._clear:
            return True
        values, errors = self._deviation.table.alive(left).sample(left * _LOOKS)
        return bool(errors[:, 0].max() < _SHARP * np.abs(values[:, 0]).max())
