"""Comparisons that conditions are made of. What cannot be decided is not taken to hold."""

from __future__ import annotations

from collections.abc import Collection

from flint import arb, fmpq

from specgate.approximations.approximation import Condition, Found
from specgate.approximations.features import Features
from specgate.approximations.figures import SHOWN
from specgate.measures.measure import Arguments
from specgate.measures.reading import sign_of
from specgate.response.answers import Answer
from specgate.terms.precision import working_precision
from specgate.terms.verdicts import Trilean


def words(text: str, holds: bool) -> Found:
    """Return a finding in words on a question that is decided."""
    return Found(text, Trilean.of(holds))


def count(number: int, holds: bool) -> Found:
    """Return a whole number that was found."""
    return Found(number, Trilean.of(holds))


def _settles(features: Features, _: Arguments, __: fmpq | None) -> Found:
    if features.hidden_instability is not None:
        return words(features.hidden_instability.reason, False)
    return words("all are" if features.stable else "at least one is not", features.stable)


SETTLES = Condition(
    key="stable",
    name="the response settles",
    source="derived",
    required="all poles strictly left of the imaginary axis",
    find=_settles,
)
"""That the response has a final value at all, decided exactly."""


OF_STEP = Condition(
    key="step",
    name="what is approximated",
    source="derived",
    required="the response of a rational transfer function, continuous in time, to a single step",
    find=lambda _, __, ___: words("it is", True),
)
"""What every row is derived for; responses of another kind have no features to look at, and never get this far."""


def _no_zeros(features: Features, _: Arguments, __: fmpq | None) -> Found:
    return count(len(features.zeros), not features.zeros)


NO_ZEROS = Condition(key="zeros", name="no zeros", source="derived", required="0 zeros", find=_no_zeros)
"""That the numerator is a constant."""


def _one_pole(features: Features, _: Arguments, __: fmpq | None) -> Found:
    return count(len(features.poles), len(features.poles) == 1)


ONE_POLE = Condition(key="poles", name="one pole", source="derived", required="1 pole", find=_one_pole)
"""That the denominator is of first order."""


def _alone(features: Features, _: Arguments, __: fmpq | None) -> Found:
    if features.pair is None:
        return words("no complex pair", False)
    more = [(len(features.others), "pole"), (len(features.zeros), "zero")]
    shown = " and ".join(f"{number} {what}{'s' if number > 1 else ''}" for number, what in more if number)
    return words(f"{shown} besides" if shown else "nothing else", features.alone)


ALONE = Condition(
    key="alone",
    name="a complex pair and nothing else",
    source="derived",
    required="no other pole, no zero",
    find=_alone,
)
"""That the channel is a pair of complex poles over a constant."""


def damping_between(low: fmpq, high: fmpq, source: str) -> Condition:
    """Return the condition that the damping ratio of the pair lies in a range, its ends included."""

    def find(features: Features, _: Arguments, __: fmpq | None) -> Found:
        damping = features.damping
        return words("no complex pair", False) if damping is None else between(damping, low, high)

    return Condition(
        key="damping",
        name="damping ratio of the pair",
        source=source,
        required=f"{decimal(low)} to {decimal(high)}",
        find=find,
    )


def counted_between(lower: fmpq, upper: fmpq) -> Condition:
    """Return the condition that a rise time is counted between two percentages of the change."""

    def find(_: Features, arguments: Arguments, __: fmpq | None) -> Found:
        counted = f"from {percent(arguments.lower)} to {percent(arguments.upper)}"
        return words(counted, (arguments.lower, arguments.upper) == (lower, upper))

    return Condition(
        key="counting",
        name="rise time counted",
        source="derived",
        required=f"from {percent(lower)} to {percent(upper)} of the change",
        find=find,
    )


def decimal(number: fmpq) -> str:
    """Return a number as a short decimal."""
    return f"{int(number.p) / int(number.q):g}"


def percent(part: fmpq) -> str:
    """Return a fraction as per cent in words."""
    return f"{100 * int(part.p) / int(part.q):g} %"


def relative_band(arguments: Arguments) -> fmpq | None:
    """Return the settling band as a fraction of the change, None where it is a distance or not given."""
    band = arguments.band
    return band.size if band is not None and band.relative else None


def band_condition(allowed: Collection[fmpq], source: str) -> Condition:
    """Return the condition that the band is one of those the formula has a number for."""

    def find(_: Features, arguments: Arguments, __: fmpq | None) -> Found:
        band = relative_band(arguments)
        if band is None:
            return words("a distance in the signal's unit", False)
        return words(f"{percent(band)} of the change", band in allowed)

    names = [percent(band) for band in allowed]
    return Condition(
        key="band",
        name="settling band",
        source=source,
        required=f"{' or '.join(names)} of the change",
        find=find,
        concerns=("settling_time",),
    )


def narrow_band_condition(widest: fmpq) -> Condition:
    """Return the condition that the band is in per cent of the change and not wider than the accuracy was shown for."""

    def find(_: Features, arguments: Arguments, threshold: fmpq | None) -> Found:
        band = relative_band(arguments)
        if band is None:
            return words("a distance in the signal's unit", False)
        return words(f"{percent(band)} of the change", threshold is not None and band <= threshold)

    return Condition(
        key="band",
        name="settling band",
        source="derived",
        required="a band of at most {threshold} of the change",
        find=find,
        threshold=widest,
        tighter="smaller",
        concerns=("settling_time",),
    )


def at_least(value: Answer, threshold: fmpq) -> Found:
    """Return what was found against a lower threshold."""
    return Found(value.enclose(SHOWN), _decided(_sign(value, threshold), 1))


def at_most(value: Answer, threshold: fmpq) -> Found:
    """Return what was found against an upper threshold."""
    return Found(value.enclose(SHOWN), _decided(_sign(value, threshold), -1))


def between(value: Answer, low: fmpq, high: fmpq) -> Found:
    """Return what was found against a range, its ends included."""
    both = (_decided(_sign(value, low), 1), _decided(_sign(value, high), -1))
    if any(side is Trilean.NO for side in both):
        holds = Trilean.NO
    else:
        holds = Trilean.of(True) if all(side is Trilean.YES for side in both) else Trilean.UNKNOWN
    return Found(value.enclose(SHOWN), holds)


def _sign(value: Answer, threshold: fmpq) -> int | None:
    """Return the sign of value minus threshold, None where it stays undecided."""
    if value.exact is not None:
        return int(value.exact > threshold) - int(value.exact < threshold)
    equal = None if value.against is None or not value.enclose(SHOWN).overlaps(arb(threshold)) else value.against
    decided = None if equal is None else equal(threshold)
    if decided is not None:
        return decided

    def difference(bits: int) -> arb:
        ball = value.enclose(bits)
        with working_precision(bits):
            return ball - threshold

    return sign_of(difference)


def _decided(sign: int | None, wanted: int) -> Trilean:
    return Trilean.UNKNOWN if sign is None else Trilean.of(sign in (0, wanted))
