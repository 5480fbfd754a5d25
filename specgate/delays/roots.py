"""The rightmost roots of a quasi-polynomial: each in a ball, and proved to be all right of a line.

A guess becomes a root by interval Newton: if m - D(m)/D'(B) lies inside of a ball B about m, there is exactly one root
in B, a simple one, and it is there. Balls that are disjoint hold different roots; as many of them as `quasi_count`
counts right of the line are all.
"""

from __future__ import annotations

from collections.abc import Callable

from flint import acb, arb, fmpq

from specgate.delays.seeds import seeds
from specgate.systems.quasi import Quasi
from specgate.systems.quasi_count import Evaluated, dominated_beyond
from specgate.systems.quasi_stability import is_stable
from specgate.terms.precision import working_precision
from specgate.terms.records import record

_FIRST = 64
_STEPS = 60


@record
class Rightmost:
    """Roots of a quasi-polynomial, all simple, of each conjugate pair the upper one, from right to left.

    Parts that are exactly zero are so in the balls.
    """

    quasi: Quasi
    roots: tuple[acb, ...]

    @property
    def count(self) -> int:
        """The number of roots with their conjugates."""
        return sum(1 if root.imag.is_zero() else 2 for root in self.roots)

    def those(self, inside: Callable[[acb], bool]) -> Rightmost:
        """Return the roots that are told to be somewhere."""
        return Rightmost(self.quasi, tuple(root for root in self.roots if inside(root)))

    def at(self, bits: int) -> tuple[acb, ...]:
        """Return the same roots in balls of about `bits` relative bits, in the same order."""
        with working_precision(bits + 16):
            function = Evaluated(self.quasi)
            return tuple(_narrowed(function, root, bits) for root in self.roots)


def certified_right(quasi: Quasi, left: fmpq, height: fmpq, fineness: float = 1.0) -> Rightmost:
    """Return roots right of Re s = left that a search up to a height finds, 0 not among them: perhaps not all.

    `quasi` is primitive and square-free, so that its roots but 0 are simple (see `quasi_stability`).
    """
    edge, top = (int(value.p) / int(value.q) for value in (left, height))
    right = 0.0 if is_stable(quasi) else _reach(quasi)
    with working_precision(_FIRST):
        function = Evaluated(quasi)
        found: list[acb] = []
        for seed in seeds(quasi, edge, top, fineness, right):
            root = certified(function, acb(seed.real, seed.imag))
            if root is None or not root.real > arb(left) or root.contains(0):
                continue
            if not any(root.overlaps(known) for known in found):
                found.append(root)
    return Rightmost(quasi, tuple(found))


def _reach(quasi: Quasi) -> float:
    """Return how far right a search for growing modes goes: about as far as they oscillate, a few delays at most."""
    height = dominated_beyond(quasi, fmpq(0))
    rate = 1.0 / (int(quasi.delayed[-1][0].p) / int(quasi.delayed[-1][0].q))
    return 6.0 * rate if height is None else min(6.0 * rate, 1.2 * int(height.p) / int(height.q) + 0.1 * rate)


def certified(function: Evaluated, guess: acb) -> acb | None:
    """Return a ball about a guess that holds exactly one root, simple, on or above the real axis; None: not found."""
    size = abs(guess).upper()
    if guess.imag.abs_upper() < size * arb(2) ** -30:
        guess = acb(guess.real)
    for exponent in (-36, -30, -24, -42, -18):
        radius = (size * arb(2) ** exponent).upper()
        real = guess.imag.is_zero()
        ball = acb(arb(guess.real.mid(), radius), arb(0 if real else guess.imag.mid(), radius))
        inner = _newton(function, ball)
        if inner is None or not ball.contains_interior(inner):
            continue
        if real:
            # The ball is its own mirror image and holds one root only, which is its own conjugate then.
            return acb(inner.real)
        if inner.imag.contains(0):
            return certified(function, acb(guess.real))
        return inner if inner.imag > 0 else None
    return None


def _newton(function: Evaluated, ball: acb) -> acb | None:
    """Return m - D(m)/D'(ball), which holds every root in the ball; None where D' may vanish."""
    slope = function.slope(ball)
    if slope.contains(0):
        return None
    middle = ball.mid()
    return middle - function.value(middle) / slope


def _narrowed(function: Evaluated, root: acb, bits: int) -> acb:
    """Return a ball that holds the root of a ball and no other, narrowed until it is not halved any more."""
    real = root.imag.is_zero()
    for _ in range(_STEPS):
        if root.rel_accuracy_bits() >= bits:
            break
        inner = _newton(function, root)
        if inner is None:
            break
        narrower = acb(_met(inner.real, root.real), arb(0) if real else _met(inner.imag, root.imag))
        if not narrower.rad() * 2 < root.rad():
            root = narrower
            break
        root = narrower
    return root


def _met(one: arb, other: arb) -> arb:
    return one.intersection(other)
