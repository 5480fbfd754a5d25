"""What is found about a requirement: verdicts, standings, audits, as values that can still be refined."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Literal

from flint import fmpq

from specgate.approximations.approximation import Condition, Found
from specgate.compliance.assumptions import Assumption
from specgate.compliance.budgets import Sum
from specgate.compliance.chains import Link
from specgate.compliance.compare import Limits
from specgate.compliance.model.fact import ModelAssumption
from specgate.compliance.readings import Reading
from specgate.compliance.scales import Bounds
from specgate.measures.measure import Arguments, Measure
from specgate.project.types import Budget, Claim, Criterion, Evidence, Limit, Method, Requirement, Share, Waiver
from specgate.response.answers import Answer
from specgate.terms.places import Place
from specgate.terms.records import record
from specgate.terms.unit import ONE, Unit
from specgate.terms.verdicts import Standing, Trilean, Verdict

Side = Literal["safe", "unsafe", "none"]
"""Of an error or a slip: whether it promises more than there is (unsafe), less (safe), or neither."""


@record
class Unanswered:
    """Something the format allows and this version does not answer, and where it is written.

    decides: whether the verdict is open because of it; else it would only have qualified the verdict.
    """

    place: Place
    what: str
    decides: bool = True


@record
class AuditedCondition:
    """A condition of an approximation against this response.

    approximation: whose condition it is. threshold: the one in force. policy: words where the project's own is.
    beyond: it would not hold with the catalogue's own threshold, which the project has loosened.
    """

    approximation: str
    condition: Condition
    threshold: fmpq | None
    found: Found
    policy: str | None = None
    beyond: bool = False


@record
class FormulaError:
    """Formula against proved value; relative = formula / truth - 1 (None where the truth is 0)."""

    absolute: Answer
    relative: Answer | None
    side: Side
    truth: Answer


@record
class Slip:
    """A claim that is further from its own formula than half a unit of its last digit."""

    side: Side


@record
class Instead:
    """What to use in place of a basis that does not stand; `computed` or a row of the catalogue (values in SI)."""

    name: str
    value: Answer | None
    variant: str | None = None


@record
class Audit:
    """The audit of a basis; all values in coherent SI, `unit` is that of the claim.

    variant: which formula of the last of the chain, where it has several.
    agrees: whether the claim agrees with its formula (None: no claim, no formula, or undecided).
    implied: interval that the stated accuracy leaves for the truth. read: the last approximation, and what it is read
    from. evidence: the id of the record that it rests on.
    """

    kind: Literal["computed", "approximation", "evidence"]
    standing: Standing
    place: Place
    reason: str | None = None
    unit: Unit | None = None
    chain: tuple[str, ...] = ()
    variant: str | None = None
    claim: Claim | None = None
    claimed: fmpq | None = None
    formula: Answer | None = None
    formula_text: str | None = None
    error: FormulaError | None = None
    agrees: bool | None = None
    slip: Slip | None = None
    implied: tuple[Answer, Answer] | None = None
    accuracy: str | None = None
    conditions: tuple[AuditedCondition, ...] = ()
    instead: Instead | None = None
    read: Link | None = None
    evidence: str | None = None


@record
class CriterionAssessment:
    """One limit: what was read, how it compares, what the claim rests on.

    reading: the measure in coherent SI. limits, limits_again: with the fixed decimal for pi, and with more digits.
    unit: in which it is printed (None: a whole number, yes or no). scale: what a number is small against, in that unit.
    beside: a second value printed next to the first. signal: the unit of the signal that is looked at, span: its span.
    assumptions: ranges of signals that the reading rests on. model: what the models of the blocks take for granted.
    """

    criterion: Criterion
    measure: Measure
    arguments: Arguments
    reading: Reading
    limits: Limits
    limits_again: Limits
    unit: Unit | None
    scale: fmpq | None
    verdict: Verdict
    audit: Audit
    reason: str | None = None
    beside: Reading | None = None
    unanswered: tuple[Unanswered, ...] = ()
    signal: Unit = ONE
    span: fmpq | None = None
    assumptions: tuple[Assumption, ...] = ()
    model: tuple[ModelAssumption, ...] = ()

    @property
    def standing(self) -> Standing:
        """The worst of what the audit of the basis and the assumptions of the model leave."""
        ranges, models = (one.standing for one in self.assumptions), (one.standing for one in self.model)
        return worst_standing((self.audit.standing, *ranges, *models))

    @property
    def least(self) -> Reading | None:
        """The lower limit."""
        return _limit(self.limits.least, self.limits_again.least)

    @property
    def most(self) -> Reading | None:
        """The upper limit."""
        return _limit(self.limits.most, self.limits_again.most)


def worst_standing(standings: Iterable[Standing]) -> Standing:
    """Return the worst of some standings. Raises ValueError for none at all."""
    return max(standings, key=(Standing.SOUND, Standing.INCONCLUSIVE, Standing.OUT_OF_RANGE).index)


def _limit(first: fmpq | None, again: fmpq | None) -> Reading | None:
    if first is None or again is None:
        return None
    return Reading(Answer.of_exact(first), Answer.of_exact(again))


@record
class Disagreement:
    """A result that is further from the computed value than is borne; all in the unit of the record."""

    result: Answer
    model: Answer
    allowed: Answer


@record
class RecordAssessment:
    """What a record shows of a requirement. stale: it is of another revision of the design, and shows nothing.

    criterion, unit, results, spread (the expanded uncertainty), worst and its reserve: where it has numbers.
    """

    evidence: Evidence
    verdict: Verdict
    stale: bool
    reason: str | None = None
    criterion: CriterionAssessment | None = None
    unit: Unit | None = None
    results: tuple[Answer, ...] = ()
    spread: Answer | None = None
    worst: Answer | None = None
    reserve: Answer | None = None
    disagreement: Disagreement | None = None


@record
class Contribution:
    """A share of a budget, on the scale of its limit, without its factor: what is given to it, and what it uses."""

    share: Share
    given: Bounds | None
    found: Bounds | None


@record
class BudgetAssessment:
    """A budget, added up. whole: the limit. given, used: what the limits, and the results, of the shares make together.

    allotted, result: whether that keeps the limit; left_over, left: what is left of it. with_reserve: whether the
    limits keep it with the reserve held back. reason: why something could not be added. unit: of everything.
    """

    budget: Budget
    limit: Limit | None = None
    whole: Bounds | None = None
    unit: Unit | None = None
    parts: tuple[Contribution, ...] = ()
    given: Sum | None = None
    used: Sum | None = None
    allotted: Trilean = Trilean.UNKNOWN
    result: Trilean = Trilean.UNKNOWN
    left_over: Answer | None = None
    left: Answer | None = None
    with_reserve: Trilean = Trilean.UNKNOWN
    reason: str | None = None


@record
class WaiverAssessment:
    """A waiver on a requirement. lapsed: why it is not in force, or None.

    needed: the requirement has something that it could excuse. covers: all of that is inside what it accepts.
    reason: what is outside.
    """

    waiver: Waiver
    lapsed: str | None
    needed: bool
    covers: bool
    reason: str | None = None

    @property
    def excuses(self) -> bool:
        """Whether it is in force, needed, and enough."""
        return self.lapsed is None and self.needed and self.covers


@record
class MethodAssessment:
    """A verification method and how it concludes; `records`: the ids of the evidence that it rests on."""

    method: Method
    outcome: Verdict | Literal["due_later", "no_record"]
    records: tuple[str, ...] = ()


@record
class Assessment:
    """A requirement, judged. verdict None: it does not apply.

    due: whether its verdict counts at this stage; where it does not, an open verdict waits for a later stage.
    """

    requirement: Requirement
    verdict: Verdict | None
    standing: Standing | None = None
    criteria: tuple[CriterionAssessment, ...] = ()
    methods: tuple[MethodAssessment, ...] = ()
    due: bool = True
    reason: str | None = None
    unanswered: tuple[Unanswered, ...] = ()
    records: tuple[RecordAssessment, ...] = ()
    waivers: tuple[WaiverAssessment, ...] = ()
    waived: bool = False
    """Whether waivers excuse that it is not met: what does not comply is inside what they accept."""
    standing_waived: bool = False
    """Whether a waiver accepts its standing."""
    budget: BudgetAssessment | None = None
