"""How a number of a piecewise response was proved (see `specgate.response.accounts`)."""

from __future__ import annotations

from flint import arb, fmpq

from specgate.response.accounts import Account, rounded_up
from specgate.response.answers import Answer
from specgate.response.extremes import Extreme
from specgate.response.piecewise.patches import LOOK, Ground
from specgate.terms.precision import working_precision

GREATEST = "the greatest of what is taken at kinks and of summits in proved brackets; all patches elsewhere are lower"
STEEPEST = (
    "the greatest slope at kinks and at points of inflection in proved brackets; on all patches elsewhere it is less"
)
FURTHEST = "the further of both extremes from that time on; beyond the last patch a bound of the tail is less"
LAST = "the last crossing of the band: beyond it a bound holds, and the search goes back from there piece by piece"
FIRST = "the first crossing of the level, from the start on, piece by piece"
INSTANT = "the value of the piece that holds the instant"
LIMITS = "each limit walked along piece by piece for its first crossing; one for ever until a bound of the tail holds"
LOBES = "the integrals of its lobes in closed form, between proved zeros; bounds where it is too flat for a sign"
SQUARES = "the integrals of the squares of its pieces in closed form"


def with_account(
    answer: Answer, ground: Ground, method: str, brackets: int | None = None, since: fmpq | None = None
) -> Answer:
    """Return a bounded answer with its account; since: the time (s) from which on a bound alone excludes it."""
    return answer.accounted(lambda: account(ground, method, brackets, since))


def accounted(extreme: Extreme, ground: Ground, method: str, final: fmpq | None = None) -> Extreme:
    """Return an extreme with the account of its value and of its time; final: the value that it is counted from."""
    bracket = None if extreme.time.refine is None else 1

    def how() -> Account:
        return account(ground, method, bracket, _outweighed(extreme.value, ground, final))

    return Extreme(extreme.value.accounted(how), extreme.time.accounted(how))


def account(ground: Ground, method: str, brackets: int | None, since: fmpq | None, **counts: int) -> Account:
    """Return the account of a search in a piecewise response."""
    until = None
    if since is not None:
        with working_precision(ground.bits):
            until = rounded_up(arb(since))
    return Account(method, ground.pieces.footing(), brackets, until, {"bits of patches": ground.bits, **counts})


def _outweighed(value: Answer, ground: Ground, final: fmpq | None) -> fmpq | None:
    """Return a time from which on nothing is as far from the final value as an extreme, by a bound alone."""
    if final is None or value.refine is None:
        return None
    ball = value.enclose(LOOK)
    with working_precision(LOOK):
        lead = abs(ball - final).lower().fmpq()
    return ground.pieces.settled_by(lead) if lead > 0 else None
