"""Numbers and limits in the words of a message: few digits, but enough to tell a result from its limit."""

from __future__ import annotations

from collections.abc import Sequence

from flint import fmpq, fmpq_poly

from specgate.approximations.approximation import Found
from specgate.compliance.assessment import Audit, AuditedCondition, CriterionAssessment
from specgate.compliance.readings import Reading
from specgate.project.types import Limit
from specgate.response.answers import Answer
from specgate.systems.delayed import DelayedChannel
from specgate.systems.quasi import Quasi
from specgate.systems.roots import Root, certified_roots
from specgate.systems.solution import Channel
from specgate.terms.enclosed import DIGITS, printed, printed_exact, printed_short
from specgate.terms.unit import Unit
from specgate.terms.units import UnitTable
from specgate.terms.verdicts import Verdict

_FEW = 4
_SECOND, _RATE, _DECIBEL = (UnitTable.standard().parse(symbol) for symbol in ("s", "rad/s", "dB"))
_MODE_BITS = 128
_SLIGHT = 0.01
"""Per cent of an error that is not worth a word."""


def number(value: float, digits: int = _FEW) -> str:
    """Write a number with so many significant digits, without an exponent from 1e-4 to 1e7."""
    text = f"{value:.{digits}g}"
    if "e" not in text or not 1e-4 <= abs(value) < 1e7:
        return text
    return f"{float(text):.0f}"


def with_unit(text: str, unit: Unit | None) -> str:
    """Put a unit behind a number; plain numbers have none."""
    return text if unit is None or unit.symbol == "1" else f"{text} {unit.symbol}"


def figure(answer: Answer, unit: Unit | None, scale: fmpq | None = None, digits: int = _FEW) -> str:
    """Write an answer that is in `unit` (as `scale` is), or the reason why it has no value."""
    value = _value(answer, scale)
    return value if isinstance(value, str) else with_unit(number(value, digits), unit)


def apart(answers: Sequence[Answer], unit: Unit) -> list[str]:
    """Write answers with as many digits as it takes to tell them from each other."""
    texts = ([figure(one, unit, digits=digits) for one in answers] for digits in range(_FEW, DIGITS))
    return next((found for found in texts if len(set(found)) == len(found)), [figure(one, unit) for one in answers])


def _value(answer: Answer, scale: fmpq | None) -> float | str:
    if answer.absent is not None:
        return "without limit" if answer.absent.infinite else f"not there ({answer.absent.reason})"
    if answer.truth is not None:
        return "yes" if answer.truth else "no"
    try:
        return (printed_exact(answer.exact) if answer.exact is not None else printed(answer.enclose, scale)).value
    except OverflowError as problem:
        return str(problem)


def limit_words(limit: Limit) -> str:
    """Write a limit as the file has it."""
    if limit.truth is not None:
        return "yes" if limit.truth else "no"
    texts = [value.as_written for value in limit.values]
    if limit.kind == "between":
        return f"between {texts[0]} and {texts[1]}"
    if limit.kind == "within":
        return f"within {texts[0]} of {texts[1]}"
    return {"at_most": "at most ", "at_least": "at least ", "equals": "equal to "}[limit.kind] + texts[0]


def subject(assessed: CriterionAssessment) -> str:
    """Name the measure and what it is read from."""
    return f"{assessed.measure.name} of {subject_name(assessed)}"


def subject_name(assessed: CriterionAssessment) -> str:
    """Name what a measure is read from: a loop, or loop and response or break."""
    about = assessed.criterion.subject
    return about.loop if about.name is None else f"{about.loop}.{about.name}"


def result(assessed: CriterionAssessment) -> str:
    """Write what was found, with enough digits to tell it from the limit."""
    unit = assessed.unit
    value = _value(assessed.reading.settled if unit is None else assessed.reading.in_unit(unit), assessed.scale)
    if isinstance(value, str):
        return value
    limits = [_printed_limit(limit, unit) for limit in (assessed.least, assessed.most) if limit is not None]
    enough = (
        digits
        for digits in range(_FEW, DIGITS)
        if all(number(value, digits) != number(limit, digits) or value == limit for limit in limits)
    )
    return with_unit(number(value, next(enough, DIGITS)), unit)


def _printed_limit(limit: Reading, unit: Unit | None) -> float:
    value = _value(limit.settled if unit is None else limit.in_unit(unit), None)
    assert not isinstance(value, str)
    return value


def criterion_words(assessed: CriterionAssessment) -> str:
    """Say what a criterion found against its limit."""
    reason = assessed.reason or ""
    if assessed.verdict is Verdict.OPEN or assessed.reading.settled.absent is not None:
        return f"{subject(assessed)}: {reason}"
    wanted = limit_words(assessed.criterion.limit)
    return f"{subject(assessed)} is {result(assessed)}{_violation(assessed)}, and {wanted} is required"


def _violation(assessed: CriterionAssessment) -> str:
    """Say where a mask is first left; nothing of other measures."""
    answer = assessed.reading.settled
    at = answer.at or {}
    value, limit = at.get("value"), at.get("limit")
    where = at.get("time", at.get("frequency"))
    if answer.truth is not False or not (isinstance(value, Answer) and isinstance(limit, Answer)):
        return ""
    over_time = "time" in at
    unit = assessed.signal if over_time else _DECIBEL
    # Where a curve goes out through a limit the two are one: the number is said once.
    printed = tuple(dict.fromkeys(apart([Reading.once(one).in_unit(unit) for one in (value, limit)], unit)))
    numbers = " against ".join(printed)
    if not isinstance(where, Answer) or where.absent is not None:
        return f" ({numbers})"
    place = figure(Reading.once(where).in_unit(_SECOND if over_time else _RATE), _SECOND if over_time else _RATE)
    return f" (first at {place}: {numbers})" if len(printed) > 1 else f" (left at {place}, at {numbers})"


def condition_words(audited: AuditedCondition) -> str:
    """Say what a condition requires and what was found."""
    found = found_value(audited.found)
    shown = "nothing" if found is None else number(found) if isinstance(found, float) else found
    condition = audited.condition
    return f"{condition.named(audited.threshold)} (required {condition.asked(audited.threshold)}, found {shown})"


def found_value(found: Found) -> float | str | None:
    """Return what a condition met, as printed: 6 significant digits, or words."""
    if found.value is None or isinstance(found.value, str):
        return found.value
    if isinstance(found.value, int):
        return float(found.value)
    return printed_short(found.value)


def promise_words(assessed: CriterionAssessment) -> str:
    """Put the promised value beside the computed one."""
    audit = assessed.audit
    promised = f"claimed {audit.claim.value.as_written}" if audit.claim is not None else ""
    if not promised and audit.formula is not None and audit.formula.absent is None:
        promised = f"its formula gives {formula_words(assessed)}"
    computed = assessed.reading.settled
    if not promised or computed.absent is not None or assessed.unit is None:
        return promised
    return f"{promised}, computed {result(assessed)}{_error(audit)}"


def _error(audit: Audit) -> str:
    """Say how far the formula is off and on which side; nothing where that is too little to matter."""
    error = audit.error
    if error is None or error.side == "none" or error.relative is None:
        return ""
    part = 100 * printed_short(error.relative.enclose(_MODE_BITS), 1.0)
    if abs(part) < _SLIGHT:
        return ""
    return f" (its formula is {'+' if part > 0 else ''}{number(part, 3)} % off, on the {error.side} side)"


def basis_words(audit: Audit) -> str:
    """Name the approximations of a basis: `near_cancellation + second_order_rise (linear)`."""
    return named(" + ".join(audit.chain), audit.variant)


def named(name: str, variant: str | None) -> str:
    """Put the variant behind the name of an approximation that has several."""
    return name if variant is None else f"{name} ({variant})"


def instead_words(assessed: CriterionAssessment) -> str:
    """Say what to use in place of a basis that does not stand."""
    instead, unit = assessed.audit.instead, assessed.audit.unit
    if instead is None or instead.value is None or unit is None or instead.name == "computed":
        return "rest the claim on `basis: computed`"
    shown = figure(Reading.once(instead.value).in_unit(unit), unit)
    name = named(instead.name, instead.variant)
    return f"rest the claim on {name}, which applies and gives {shown}, or on `basis: computed`"


def claim_words(assessed: CriterionAssessment) -> str:
    """Write the claimed value as the file has it."""
    claim = assessed.audit.claim
    return claim.value.as_written if claim is not None else "nothing"


def formula_words(assessed: CriterionAssessment) -> str:
    """Write the value of the formula, in the unit of the claim."""
    audit = assessed.audit
    assert audit.formula is not None
    assert audit.unit is not None
    return figure(Reading.once(audit.formula).in_unit(audit.unit), audit.unit)


def hides(channel: Channel | DelayedChannel) -> bool:
    """Whether a channel hides any mode."""
    hidden = channel.hidden
    return hidden.degree() > 0 if isinstance(hidden, fmpq_poly) else not hidden.is_rational or hidden.degree > 0


def modes(of: fmpq_poly | Quasi) -> str:
    """Name the modes of a polynomial by their poles: `a mode at 0.5 1/s`, `modes at -1 ± 2j 1/s`."""
    polynomial = of if isinstance(of, fmpq_poly) else of.polynomial
    if polynomial is None:
        return "the modes of a loop with dead time"
    shown = [_pole(root) for root in certified_roots(polynomial, _MODE_BITS) if not root.value.imag < 0]
    return f"{'modes' if polynomial.degree() > 1 else 'a mode'} at {', '.join(shown)} 1/s"


def _pole(root: Root) -> str:
    real = number(printed_short(root.value.real))
    imaginary = printed_short(root.value.imag)
    place = real if imaginary == 0 else f"{real} ± {number(imaginary)}j"
    return place if root.multiplicity == 1 else f"{place} ({root.multiplicity} times)"
