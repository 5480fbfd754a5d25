"""How a number over frequency, or of the modes, of a loop with dead time was proved (see `response.accounts`)."""

from __future__ import annotations

from specgate.response.accounts import Footing

UNIT = "all points with |L| = 1: zeros of |N|^2 - |D|^2, isolated cell by cell up to where |L| < 1 for good"
REAL = (
    "all points with L real and negative, up to where none is nearer to -1 than the nearest one: zeros of "
    "Im(N conj D), isolated cell by cell"
)
PEAK = "the greatest at the ends of the axis and at summits in proved brackets; on all patches elsewhere it is less"
FALL = "the first arrivals at the factor of 3 dB rounded up and down"
TURN = "the arguments of N and D, followed from zero frequency cell by cell"
ROOM = "the sign of mask minus gain, cell by cell"
LEAST = (
    "the least over the poles right of a line, counted by the change of argument along it; all others lie left of it"
)
NEAREST = "the least over the poles in a disc about the origin, counted by the change of argument along its circle"

AXIS = Footing("N/D, sums of polynomials times e^(-delay s), in balls along the imaginary axis")
