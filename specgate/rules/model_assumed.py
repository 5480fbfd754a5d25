"""A requirement rests on a model that is assumed.

A subsystem says with `pedigree` what kind of knowledge its model is: identified from measurements, derived from
physical laws, taken from a data sheet, or assumed. A verdict on an assumed model is one on an assumption. The finding
is a note and leaves the standing as it is: it says what has to be measured before the verdict can be relied on. Put it
right with a measurement, a law or a data sheet, named under `from`.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from specgate.compliance.resting import Resting, resting
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding, Related
from specgate.terms.verdicts import Level, Trilean

NAME = "model-assumed"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every requirement that rests on assumed models, all of them in one sentence."""
    for name, found in _by_requirement(facts).items():
        models = {one.assumption.subsystem: one.assumption for one in found}
        listed = ", ".join(str(block) for block in models)
        are = "the model of {} is" if len(models) == 1 else "the models of {} are"
        yield Finding(
            NAME,
            Level.NOTE,
            f"{name}: {are.format(listed)} assumed, and nobody has shown that the verdict holds for what is built",
            found[0].place,
            requirement=name,
            related=tuple(Related(one.place, f"`pedigree` of {block}") for block, one in models.items()),
        )


def _by_requirement(facts: Facts) -> Mapping[str, list[Resting]]:
    found: dict[str, list[Resting]] = {}
    for one in resting(facts.assessments, "pedigree"):
        if one.assumption.holds is not Trilean.YES:
            found.setdefault(one.requirement, []).append(one)
    return found


RULE = Rule(NAME, "Model assumed", "note", check, __doc__)
