"""The audit of a basis: does the formula apply, is the claim its value, how far is it off, does it decide, what else.

The five questions of the catalogue of approximations, answered for one criterion. The verdict never comes from here: it
comes from the computed response; the audit says whether the claim stands.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from flint import arb, fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.conditions import OF_STEP
from specgate.approximations.figures import negative, smallest
from specgate.approximations.late import derived_for
from specgate.approximations.table import APPROXIMATIONS, conditions, without_row
from specgate.approximations.viewed import Viewed
from specgate.compliance.assessment import Audit, AuditedCondition, Instead, Side, Slip
from specgate.compliance.chains import Link, Linked, linked
from specgate.compliance.claims import claim_range, claim_unit
from specgate.compliance.compare import Limits, sign
from specgate.compliance.readings import PI_DECIDES, Reading
from specgate.compliance.sides import formula_error, side
from specgate.compliance.thresholds import Policy
from specgate.compliance.wording import apart, condition_words
from specgate.measures.measure import Arguments
from specgate.measures.subjects import ResponseSubject
from specgate.project.parameters import Values, evaluate
from specgate.project.types import Basis, Claim
from specgate.response.answers import Answer
from specgate.terms.enclosed import ends, rounded
from specgate.terms.precision import working_precision
from specgate.terms.records import record
from specgate.terms.unit import Unit
from specgate.terms.verdicts import Standing, Trilean

_NO_BOUND = "the stated accuracy sets no bound on this side"


@record
class Matter:
    """What a basis is audited against.

    viewed, again: what is looked at, with the fixed decimal for pi and with more digits (the same object where pi has
    no part in it). reading: the proved value of the criterion's measure. unit: of the result.
    """

    viewed: Viewed
    again: Viewed
    arguments: Arguments
    reading: Reading
    limits: Limits
    values: Values
    unit: Unit

    @property
    def truth(self) -> Answer | None:
        """The proved value; None where there is none."""
        answer = self.reading.settled
        return None if answer.absent is not None or answer.truth is not None else answer


def audit(basis: Basis, matter: Matter, policy: Policy) -> Audit:
    """Audit an approximation. Raises Fault for a claim that cannot be evaluated."""
    unit = matter.unit if basis.claimed is None else claim_unit(basis.claimed, matter.unit)
    claimed = None if basis.claimed is None else evaluate(basis.claimed.value, matter.values)
    started = Audit(
        "approximation",
        Standing.INCONCLUSIVE,
        basis.place,
        unit=unit,
        chain=basis.chain,
        variant=basis.variant,
        claim=basis.claimed,
        claimed=claimed,
    )
    unknown = next((name for name in basis.chain if name not in APPROXIMATIONS), None)
    if unknown is not None:
        return replace(started, reason=without_row(unknown))
    chained = linked(basis, matter.viewed, matter.again, matter.arguments)
    audited = replace(
        started,
        variant=chained.row.variant,
        read=chained.links[-1] if chained.nothing is None else None,
        conditions=tuple(_union(chained, matter.arguments, policy)),
    )
    audited = _evaluated(audited, chained, matter)
    return _offered(_stood(audited, chained.row, matter), matter, policy)


def audit_beyond(basis: Basis, beyond: str, reading: Reading, values: Values, unit: Unit) -> Audit:
    """Audit an approximation of a response of a kind that none is derived for. Raises Fault."""
    claim = basis.claimed
    condition = AuditedCondition(basis.chain[-1], OF_STEP, None, Found(beyond, Trilean.NO))
    answer = reading.settled
    known = answer.absent is None and answer.truth is None
    return Audit(
        "approximation",
        Standing.OUT_OF_RANGE,
        basis.place,
        condition_words(condition),
        unit if claim is None else claim_unit(claim, unit),
        basis.chain,
        basis.variant,
        claim,
        None if claim is None else evaluate(claim.value, values),
        conditions=(condition,),
        instead=Instead("computed", answer if known else None),
    )


# --- 1: does it apply ---------------------------------------------------------------------------------------


def _union(chained: Linked, arguments: Arguments, policy: Policy) -> Iterator[AuditedCondition]:
    """Yield the conditions of all links; one that holds for two of them is said once."""
    held: set[tuple[str, str]] = set()
    for link in chained.links:
        for one in audited_conditions(link, arguments, policy):
            name = one.approximation, one.condition.key
            if name not in held or one.found.holds is not Trilean.YES:
                yield one
            if one.found.holds is Trilean.YES:
                held.add(name)


def audited_conditions(
    link: Link, arguments: Arguments, policy: Policy, known: dict[int, AuditedCondition] | None = None
) -> Iterator[AuditedCondition]:
    """Yield every condition of a link, those of its premises first, with what was found.

    known: what other rows have found with the same arguments in the same response, by the identity of the condition.
    """
    kept = {} if known is None else known
    for owner, condition in conditions(link.row.name, arguments.measure, link.row.variant):
        if id(condition) in kept:
            yield kept[id(condition)]
            continue
        own = policy.own(owner.name, condition)
        threshold = condition.threshold if own is None else own.stated
        found = _found(condition, link, arguments, threshold)
        beyond = (
            own is not None
            and own.looser
            and _found(condition, link, arguments, own.catalogue).holds is not Trilean.YES
        )
        words = None if own is None else own.words
        kept[id(condition)] = AuditedCondition(owner.name, condition, threshold, found, words, beyond)
        yield kept[id(condition)]


def _found(condition: Condition, link: Link, arguments: Arguments, threshold: fmpq | None) -> Found:
    found = condition.find(link.viewed, arguments, threshold)
    if link.again is link.viewed:
        return found
    again = condition.find(link.again, arguments, threshold)
    return found if again.holds is found.holds else Found(PI_DECIDES, Trilean.UNKNOWN)


# --- 2, 3 and 4: the claim, the error, what is left open ------------------------------------------------------


def _evaluated(audited: Audit, chained: Linked, matter: Matter) -> Audit:
    formula = chained.formula(matter.arguments)
    outside = any(one.beyond or one.found.holds is Trilean.NO for one in audited.conditions)
    accuracy = None if outside or formula.absent is not None else chained.accuracy(matter.arguments)
    audited = replace(
        audited,
        formula=formula,
        formula_text=chained.row.formula,
        accuracy=None if accuracy is None else accuracy.text,
    )
    if formula.absent is None and matter.truth is not None:
        audited = replace(audited, error=formula_error(formula, matter.truth, matter.limits))
    if formula.absent is None and audited.claim is not None:
        agrees = _agrees(audited.claim, formula, matter)
        slip = Slip(_slip_side(audited, formula, matter)) if agrees is False else None
        audited = replace(audited, agrees=agrees, slip=slip)
    return replace(audited, implied=_implied(audited, formula, accuracy))


def _agrees(claim: Claim, formula: Answer, matter: Matter) -> bool | None:
    """Whether a claim is its formula, rounded; None where that cannot be told."""
    low, high = claim_range(claim, claim_unit(claim, matter.unit), matter.values)
    above, below = sign(formula, low), sign(formula, high)
    if above == -1 or below == 1:
        return False
    return None if above is None or below is None else True


def _slip_side(audited: Audit, formula: Answer, matter: Matter) -> Side:
    assert audited.claimed is not None
    return side(Answer.of_exact(audited.claimed), formula, matter.limits)


def _implied(audited: Audit, formula: Answer, accuracy: Accuracy | None) -> tuple[Answer, Answer] | None:
    """Return the interval in which the truth lies if the claim errs as stated: claim/(1+e).

    A claim is its formula rounded, and it is the formula that errs as stated: the interval runs over both, so that the
    truth is in it however few digits the claim has.
    """
    if accuracy is None or formula.absent is not None:
        return None
    bases = [formula] if audited.claimed is None else [Answer.of_exact(audited.claimed), formula]
    bounded = accuracy.lower > -1
    errors = (accuracy.lower, accuracy.upper) if bounded else (accuracy.upper,)
    ends = [_divided(base, 1 + error) for base in bases for error in errors]
    greatest = negative(smallest([negative(end) for end in ends]))
    return smallest(ends), greatest if bounded else Answer.nothing(_NO_BOUND, infinite=True)


def _divided(value: Answer, by: fmpq) -> Answer:
    if value.exact is not None:
        return Answer.of_exact(value.exact / by)

    def refine(bits: int) -> arb:
        ball = value.enclose(bits)
        with working_precision(bits):
            return ball / by

    return Answer.of_ball(refine)


def _stood(audited: Audit, row: Approximation, matter: Matter) -> Audit:
    """Return the audit with its standing and the reason for it."""
    standing, reason = _standing(audited, row, matter)
    return replace(audited, standing=standing, reason=reason)


def _standing(audited: Audit, row: Approximation, matter: Matter) -> tuple[Standing, str | None]:
    broken = [one for one in audited.conditions if one.found.holds is Trilean.NO]
    if broken:
        return Standing.OUT_OF_RANGE, "; ".join(condition_words(one) for one in broken)
    formula = audited.formula
    if formula is None or formula.absent is not None:
        why = formula.absent.reason if formula is not None and formula.absent is not None else "no value"
        return Standing.OUT_OF_RANGE, f"the formula has no value here: {why}"
    if row.always_safe == "under" and matter.limits.most is not None:
        return Standing.OUT_OF_RANGE, "it is a lower bound, and no lower bound shows that a limit from above is met"
    undecided = [one for one in audited.conditions if one.found.holds is Trilean.UNKNOWN]
    if undecided:
        named = "; ".join(one.condition.named(one.threshold) for one in undecided)
        return Standing.INCONCLUSIVE, f"it cannot be decided whether this holds: {named}"
    beyond = [one for one in audited.conditions if one.beyond]
    if beyond:
        named = "; ".join(one.condition.named(one.condition.threshold) for one in beyond)
        return Standing.INCONCLUSIVE, f"no accuracy is stated beyond the catalogue's own range: {named}"
    if audited.implied is None:
        return Standing.INCONCLUSIVE, "no accuracy is stated for this formula with these arguments"
    if _leaves_open(audited.implied, matter.limits):
        low, high = apart([Reading.once(end).in_unit(matter.unit) for end in audited.implied], matter.unit)
        if audited.implied[1].absent is not None:
            return Standing.INCONCLUSIVE, f"it leaves {low} or more for the truth, and the limit lies above that"
        reason = f"its accuracy leaves {low} to {high} for the truth, and the limit lies between them"
        return Standing.INCONCLUSIVE, reason
    return Standing.SOUND, None


def _leaves_open(interval: tuple[Answer, Answer], limits: Limits) -> bool:
    """Whether some of an interval meets a limit and some does not; touching a limit meets it."""
    low, high = interval
    least, most = limits.least, limits.most
    endless = high.absent is not None
    below = least is not None and sign(low, least) == -1 and (endless or sign(high, least) != -1)
    above = most is not None and sign(high, most) == 1 and sign(low, most) != 1
    return below or above


# --- 5: what instead --------------------------------------------------------------------------------------------


def _offered(audited: Audit, matter: Matter, policy: Policy) -> Audit:
    if audited.standing is Standing.SOUND:
        return audited
    truth = matter.truth
    if truth is None:
        return replace(audited, instead=Instead("computed", None))
    candidates = [Instead(row.name, value, row.variant) for row, value in _applicable(audited, matter, policy)]
    safe = [one for one in candidates if one.value is not None and side(one.value, truth, matter.limits) != "unsafe"]
    nearest = min(safe, key=lambda one: _distance(one.value, truth), default=Instead("computed", truth))
    return replace(audited, instead=nearest)


def _applicable(audited: Audit, matter: Matter, policy: Policy) -> Iterator[tuple[Approximation, Answer]]:
    """Yield the rows of the catalogue that estimate the measure, apply here and have a value; alternatives first."""
    for row in _others(audited):
        if matter.arguments.measure not in row.estimates or not _derived_for(row, matter.viewed):
            continue
        link = Link(row, matter.viewed, matter.again)
        if all(one.found.holds is Trilean.YES for one in audited_conditions(link, matter.arguments, policy)):
            value = row.evaluate(matter.viewed, matter.arguments)
            if value.absent is None:
                yield row, value


def _derived_for(row: Approximation, viewed: Viewed) -> bool:
    subject = viewed.subject
    return not isinstance(subject, ResponseSubject) or derived_for(subject, row.inputs, late=row.late)


def _others(audited: Audit) -> Iterator[Approximation]:
    """Yield what could stand in place of a basis: other variants of its formula, its alternatives, all other rows."""
    last = APPROXIMATIONS[audited.chain[-1]]
    yield from (last.taken_as(one.name) for one in last.variants if one.name != audited.variant)
    for name in dict.fromkeys([*last.alternatives, *APPROXIMATIONS]):
        if name not in audited.chain:
            yield APPROXIMATIONS[name]


def _distance(value: Answer | None, truth: Answer) -> fmpq:
    """Return how far an estimate is from the truth, to the digits that are printed (ties go to the first)."""
    assert value is not None
    with working_precision(128):
        return rounded(ends(abs(value.enclose(128) - truth.enclose(128)))[1], "up")
