"""What is worse: the order of verdicts, standings and outcomes. A smaller reserve alone is a change, not worse.

Verdicts fall from compliant over open to non-compliant, standings from sound over inconclusive to out of range, and a
requirement that no longer applies, or is no longer there, is worse than one that does: nothing shows it any more. What
is new is not worse by being there; the findings on it and the gate say what is.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping

from specgate.revisions.types import RequirementDifference, RequirementState, Worsening

WORSE, BETTER, MIXED, CHANGED = "worse", "better", "mixed", "changed"
_SCALE = {"not_applicable": 0, "non_compliant": 1, "open": 2, "no_record": 2, "compliant": 3}
_STANDINGS = {"out_of_range": 0, "inconclusive": 1, "sound": 2}


def moved(old: str | None, new: str | None, *, standing: bool = False) -> int:
    """Return 1 where a verdict, outcome of a method, or standing rose, -1 where it fell, else 0."""
    scale = _STANDINGS if standing else _SCALE
    if old not in scale or new not in scale:
        return 0
    return (scale[new] > scale[old]) - (scale[new] < scale[old])


def judged(moves: Iterable[int]) -> str:
    """Return the word for several moves together."""
    found = set(moves)
    if {1, -1} <= found:
        return MIXED
    return WORSE if -1 in found else BETTER if 1 in found else CHANGED


def moves(difference: RequirementDifference) -> Iterator[int]:
    """Give every move of a requirement: of itself, of its methods and of its criteria."""
    old, new = difference.old, difference.new
    if old is None or new is None:
        yield -1 if new is None and old is not None and old.verdict != "not_applicable" else 0
        return
    yield moved(old.verdict, new.verdict)
    yield moved(old.standing, new.standing, standing=True)
    yield from (moved(old.methods[key], new.methods[key]) for key in old.methods.keys() & new.methods.keys())
    for one in difference.criteria:
        if one.old is not None and one.new is not None:
            yield moved(one.old.verdict, one.new.verdict)
            yield moved(one.old.standing, one.new.standing, standing=True)


def worsenings(difference: RequirementDifference) -> Iterator[Worsening]:
    """Say what got worse in a requirement: itself where it did, else its methods and criteria."""
    old, new, name = difference.old, difference.new, difference.id
    if old is None or new is None:
        if new is None and old is not None and old.verdict != "not_applicable":
            yield Worsening("removed", name, old.verdict, None, location=old.location)
        return
    if moved(old.verdict, new.verdict) < 0:
        kind = "applicability" if new.verdict == "not_applicable" else "verdict"
        yield Worsening(kind, name, old.verdict, new.verdict, location=new.location)
    if moved(old.standing, new.standing, standing=True) < 0:
        yield Worsening("standing", name, old.standing, new.standing, location=new.location)
    yield from _methods(name, old, new)
    yield from _criteria(difference, new)


def _methods(name: str, old: RequirementState, new: RequirementState) -> Iterator[Worsening]:
    for key in sorted(old.methods.keys() & new.methods.keys()):
        before, after = old.methods[key], new.methods[key]
        if moved(before, after) < 0 and (before, after) != (old.verdict, new.verdict):
            yield Worsening("verdict", name, before, after, on=key, location=new.location)


def _criteria(difference: RequirementDifference, state: RequirementState) -> Iterator[Worsening]:
    """Give what got worse in a criterion and does not show in the requirement."""
    for one in difference.criteria:
        if one.old is None or one.new is None or difference.old is None:
            continue
        on = f"{one.measure} of {one.new.on}"
        verdicts, standings = (one.old.verdict, one.new.verdict), (one.old.standing, one.new.standing)
        if moved(*verdicts) < 0 and verdicts != (difference.old.verdict, state.verdict):
            yield Worsening("verdict", difference.id, *verdicts, on=on, location=state.location)
        if moved(*standings, standing=True) < 0 and standings != (difference.old.standing, state.standing):
            yield Worsening("standing", difference.id, *standings, on=on, location=state.location)


_KINDS = ("gate", "verdict", "applicability", "removed", "standing", "finding")
_GRAVITY: Mapping[str | None, int] = {"hold": 0, "non_compliant": 1, "open": 2, "out_of_range": 1, "inconclusive": 2}


def gravity(one: Worsening) -> tuple[int, int, str, str, str]:
    """Return what worsenings are sorted by, the gravest first."""
    return _KINDS.index(one.kind), _GRAVITY.get(one.new, 3), one.name, one.on or "", one.message or ""
