"""What drives a response: a linear system of its own, set anew at given times.

Steps, ramps and parabolas on one input are one chain w, w', w'' that is known exactly at every time, so that a ramp
that is held ends as exactly constant; a sine is a pair w, w' of its own. One minus a cosine has a state that says where
it is fed in, and that is exactly zero before and after; what it is in between is said by `Swings`. An impulse has one
that is always zero: by where it is fed in the other states jump.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import accumulate
from math import factorial, pi, sqrt

from flint import fmpq, fmpq_mat, fmpq_poly

from specgate.response.inputs import Bump, Input, Term, terms
from specgate.sampled.state_space import Row, diagonal
from specgate.systems.polynomials import order_at_origin
from specgate.terms.decimals import exact_decimal
from specgate.terms.records import record

Setting = tuple[fmpq | None, ...]
"""What each state is set to; None: it stays as it is."""


@record
class Drive:
    """w[source] = reads[source] r, r' = motion r, with r set at each of `starts` (time in s), the first of them at 0.

    rest: the values that the sources keep from the last start on; None where one keeps none. bumps: one minus a cosine
    each, and the state that it has while it acts. impulses: state, time, area.
    """

    sources: tuple[str, ...]
    motion: fmpq_mat
    reads: tuple[Row, ...]
    starts: tuple[tuple[fmpq, Setting], ...]
    rest: tuple[fmpq, ...] | None
    bumps: tuple[tuple[int, Bump], ...] = ()
    impulses: tuple[tuple[int, fmpq, fmpq], ...] = ()

    @property
    def order(self) -> int:
        """How many states it has."""
        return int(self.motion.nrows())

    @property
    def period(self) -> fmpq | None:
        """The period of the slowest sine to three digits, the same on every processor; None without any."""
        squares = [-self.motion[k + 1, k] for k in range(self.order - 1) if self.motion[k + 1, k] < 0]
        if not squares:
            return None
        slowest = min(squares)
        return exact_decimal(f"{2 * pi / sqrt(int(slowest.p) / int(slowest.q)):.2e}")

    @property
    def last(self) -> Row:
        """The states as they are set last, where all sources rest."""
        states = [fmpq(0)] * self.order
        for _, setting in self.starts:
            states = [old if new is None else new for old, new in zip(states, setting, strict=True)]
        return states


@record
class _Part:
    """Some states on one source: read as the first of them."""

    source: str
    motion: fmpq_mat
    starts: tuple[tuple[fmpq, Row], ...]
    rest: fmpq | None
    bump: Bump | None = None
    area: fmpq | None = None


def step(source: str, size: fmpq) -> Drive:
    """Return a step at t = 0."""
    return Drive((source,), fmpq_mat(1, 1), ([fmpq(1)],), ((fmpq(0), (size,)),), (size,))


def drive(driven: Sequence[tuple[str, Input]]) -> Drive:
    """Return inputs that act at once as one drive. Raises ValueError for white noise."""
    powers: dict[str, list[tuple[fmpq, int, fmpq]]] = {}
    parts: list[_Part] = []
    for source, given in driven:
        powers.setdefault(source, [])
        for term in terms(given):
            if isinstance(term, Bump):
                parts.append(_bump(source, term))
                continue
            if term.numerator.degree() > term.denominator.degree():
                area = term.size * term.numerator[1]
                parts.append(_Part(source, fmpq_mat(1, 1), ((term.begin, [fmpq(0)]),), fmpq(0), area=area))
                continue
            order = order_at_origin(term.denominator)
            if order == term.denominator.degree():
                lead = term.numerator[0] / term.denominator.leading_coefficient()
                powers[source].append((term.begin, order, term.size * lead))
            else:
                parts.append(_sine(source, term))
    chains = [_chain(source, events) for source, events in powers.items() if events]
    return _joined(tuple(powers), [*chains, *parts])


def _chain(source: str, events: Sequence[tuple[fmpq, int, fmpq]]) -> _Part:
    """Return steps in w and its derivatives as one chain; events: time, order of the derivative, by how much."""
    size = max(order for _, order, _ in events) + 1
    motion = fmpq_mat(size, size, [fmpq(int(j == i + 1)) for i in range(size) for j in range(size)])
    states, now = [fmpq(0)] * size, fmpq(0)
    starts: list[tuple[fmpq, Row]] = []
    for time in sorted({begin for begin, _, _ in events}):
        states = [_moved(states[i:], time - now) for i in range(size)]
        for begin, order, amount in events:
            if begin == time:
                states[order] += amount
        now = time
        starts.append((time, list(states)))
    return _Part(source, motion, tuple(starts), None if any(states[1:]) else states[0])


def _moved(derivatives: Sequence[fmpq], time: fmpq) -> fmpq:
    return sum((d * time**k / fmpq(factorial(k)) for k, d in enumerate(derivatives)), fmpq(0))


def _sine(source: str, term: Term) -> _Part:
    """Return amplitude * sin(rate t) from the start of a term on: its transform is size c/(s^2 + rate^2)."""
    square = term.denominator[0]
    # sin starts with the slope size * rate * rate/rate: the numerator of the term holds s, cancelled by the step's 1/s
    slope = term.size * (term.numerator // fmpq_poly([0, 1]))[0]
    motion = fmpq_mat(2, 2, [fmpq(0), fmpq(1), -square, fmpq(0)])
    return _Part(source, motion, ((term.begin, [fmpq(0), slope]),), None)


def _bump(source: str, bump: Bump) -> _Part:
    """Return one minus a cosine, which begins and ends at zero."""
    ends = (bump.begin, bump.begin + bump.period)
    return _Part(source, fmpq_mat(1, 1), tuple((time, [fmpq(0)]) for time in ends), fmpq(0), bump)


def _joined(sources: tuple[str, ...], parts: Sequence[_Part]) -> Drive:
    motion = diagonal(part.motion for part in parts)
    reads: list[Row] = [[] for _ in sources]
    for part in parts:
        size = int(part.motion.nrows())
        for row, source in zip(reads, sources, strict=True):
            row += [fmpq(int(source == part.source and k == 0)) for k in range(size)]
    times = sorted({fmpq(0), *(time for part in parts for time, _ in part.starts)})
    starts = tuple((time, tuple(_setting(parts, time))) for time in times)
    rest = None
    if all(part.rest is not None for part in parts):
        rest = tuple(
            sum((part.rest for part in parts if part.source == source and part.rest is not None), fmpq(0))
            for source in sources
        )
    firsts = accumulate((int(part.motion.nrows()) for part in parts), initial=0)
    placed = list(zip(firsts, parts, strict=False))
    bumps = tuple((first, part.bump) for first, part in placed if part.bump is not None)
    impulses = tuple((first, part.starts[0][0], part.area) for first, part in placed if part.area is not None)
    return Drive(sources, motion, tuple(reads), starts, rest, bumps, impulses)


def _setting(parts: Sequence[_Part], time: fmpq) -> Iterator[fmpq | None]:
    for part in parts:
        size = int(part.motion.nrows())
        found = next((states for begin, states in part.starts if begin == time), None)
        if found is not None:
            yield from found
        else:
            yield from [fmpq(0) if time == 0 else None] * size
