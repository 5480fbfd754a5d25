"""What approximations look at: a response (through a dead time or not), a loop opened at a break, a whole loop."""

from __future__ import annotations

from specgate.approximations.features import Features
from specgate.approximations.late import LateResponse
from specgate.approximations.opened import OpenedLoop
from specgate.approximations.whole import WholeLoop

Viewed = Features | LateResponse | OpenedLoop | WholeLoop
"""What a measure is read from decides which of them: `around` is the opened loop that rules for loops look at."""
