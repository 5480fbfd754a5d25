"""Checks of one criterion: what it measures against the units of its limit, its arguments and its claim."""

from __future__ import annotations

from collections.abc import Callable, Mapping

from flint import fmpq

from specgate.measures.measure import Measure, UnitRule
from specgate.measures.table import MEASURES
from specgate.project import faults
from specgate.project.counting import refuse_unsaid, shown
from specgate.project.faults import Fault, Faults
from specgate.project.masks import check_mask
from specgate.project.parameters import Values, evaluate, infer, written_numbers
from specgate.project.percent import refuse_ambiguous, relative_to_change
from specgate.project.rational_forms import refuse_written_rate
from specgate.project.signals import LoopSignals
from specgate.project.subsystem_checks import wants
from specgate.project.types import Criterion, Limit, MaskDefinition, Requirement, Value
from specgate.terms.dimensions import DIMENSIONLESS, RATE, TIME, Dimension
from specgate.terms.expressions import PercentOf, as_dimension, literal_unit
from specgate.terms.unit import ONE, Unit

_DIMENSIONS: Mapping[UnitRule, Callable[[Dimension], Dimension]] = {
    UnitRule.SECOND: lambda _: TIME,
    UnitRule.SIGNAL: lambda signal: signal,
    UnitRule.CHANGE: lambda signal: signal,
    UnitRule.SIGNAL_RATE: lambda signal: signal / TIME,
    UnitRule.SIGNAL_SECOND: lambda signal: signal * TIME,
    UnitRule.SIGNAL_SQUARED_SECOND: lambda signal: signal**2 * TIME,
    UnitRule.COUNT: lambda _: DIMENSIONLESS,
    UnitRule.RATIO: lambda _: DIMENSIONLESS,
    UnitRule.DECIBEL: lambda _: DIMENSIONLESS,
    UnitRule.DEGREE: lambda _: DIMENSIONLESS,
    UnitRule.RADIAN_PER_SECOND: lambda _: RATE,
    UnitRule.PER_SECOND: lambda _: RATE,
    UnitRule.PER_SECOND_SQUARED: lambda _: TIME**-2,
}
"""Dimension of a limit by the rule of its measure, from the dimension of the signal."""

_OF_SIGNAL = frozenset(
    {
        UnitRule.SIGNAL,
        UnitRule.CHANGE,
        UnitRule.SIGNAL_RATE,
        UnitRule.SIGNAL_SECOND,
        UnitRule.SIGNAL_SQUARED_SECOND,
    }
)
_RATIOS = frozenset({UnitRule.RATIO, UnitRule.DECIBEL})

_SECOND = Unit("s", fmpq(1), 0, TIME)
_FREQUENCY = Unit("rad/s", fmpq(1), 0, RATE)

_ONE_SIDED = {("maximum_value", "at_most"), ("minimum_value", "at_least")}
"""Where a value on the other side of zero is no mistake: a greatest value not to exceed, a least one to stay above."""


class CriterionCheck:
    """The checks of one criterion; `unit` is that of the signal it is about, 1 for a break or a loop."""

    def __init__(self, signals: LoopSignals, criterion: Criterion, values: Values) -> None:
        self.criterion, self.values = criterion, values
        self.measure: Measure = MEASURES[criterion.measure]
        self.unit: Unit = ONE
        self.span: fmpq | None = None
        self.driven: list[tuple[str, Unit]] = []
        self.referred = False
        self.kind: str | None = None
        subject = criterion.subject
        if subject.kind == "response" and subject.name is not None:
            response = signals.loop.responses[subject.name]
            self.unit, self.span = signals.unit(response.to), signals.span(response.to)
            self.kind = response.excitations[0].kind if len(response.excitations) == 1 else "several"
            self.driven = [(one.source, signals.unit(one.source)) for one in response.excitations]
            self.referred = response.reference is not None

    def exists(self) -> None:
        """See that the measure exists for the input of the response. Raises Fault."""
        if self.kind is not None and self.kind not in self.measure.inputs:
            given = "several inputs at once" if self.kind == "several" else f"the input {self.kind}"
            inputs = [kind for kind in self.measure.inputs if kind != "several"]
            raise Fault(
                faults.VALUE,
                f"`{self.measure.name}` does not exist for {given}; it does for {', '.join(inputs)}",
                self.criterion.subject.place,
            )

    def reference(self) -> None:
        """See that an error has something to be measured from. Raises Fault."""
        if not self.measure.of_error or self.referred or len(self.driven) != 1:
            return
        ((source, unit),) = self.driven
        if unit.dimension != self.unit.dimension:
            raise Fault(
                faults.DIMENSION,
                f"{self.measure.name} is measured from the input `{source}`, which is in {unit.symbol}, the signal "
                f"in {self.unit.symbol}: name a `reference` in the response, a signal or 0",
                self.criterion.subject.place,
            )

    # --- limits -------------------------------------------------------------------------------------------

    def limit(self) -> None:
        """Check the units of a limit, then its sign. Raises Fault."""
        limit = self.criterion.limit
        if self.measure.unit is UnitRule.YES_NO:
            if limit.truth is None:
                message = f"`{self.measure.name}` is yes or no: limit it by `equals: true` or `equals: false`"
                raise Fault(faults.DIMENSION, message, limit.place)
            return
        if limit.truth is not None:
            message = f"`{self.measure.name}` is a number: yes or no is no limit for it"
            raise Fault(faults.DIMENSION, message, limit.place)
        for value in limit.values:
            self.counted(value)
        self._order(limit)
        self._sign(limit)

    def counted(self, value: Value) -> None:
        """Check that a limit or a claim is in a unit of the measure. Raises Fault."""
        rule = self.measure.unit
        if rule is UnitRule.YES_NO:
            message = f"`{value.as_written}`: {self.measure.name} is yes or no, which no value can stand for"
            raise Fault(faults.DIMENSION, message, value.place)
        self._decibel(value)
        if rule in _OF_SIGNAL:
            refuse_ambiguous(value, self.unit)
        if rule is UnitRule.CHANGE and relative_to_change(value) is not None:
            return
        if rule is UnitRule.RADIAN_PER_SECOND:
            refuse_written_rate(value, self.values)
        if rule is UnitRule.PER_SECOND:
            self._no_cycles(value)
        if rule is UnitRule.DEGREE:
            self._angle(value)
        self._of_span(value)
        self._dimension(value, _DIMENSIONS[rule](self.unit.dimension))

    def _dimension(self, value: Value, wanted: Dimension) -> None:
        inferred = infer(value, self.values, None, self.unit.dimension)
        plain_zero = as_dimension(inferred) == DIMENSIONLESS and evaluate(value, self.values, None, self.span) == 0
        if as_dimension(inferred) != wanted and not plain_zero:
            offered = " or % of the change" if self.measure.unit is UnitRule.CHANGE else ""
            percent = relative_to_change(value) is not None
            found = "per cent of nothing in particular (`% of span`, `% of` a parameter?)" if percent else ""
            raise Fault(
                faults.DIMENSION,
                f"`{value.as_written}`: {self.measure.name} is in {self._shown(wanted)}{offered}, "
                f"this is {found or shown(value, inferred)}",
                value.place,
            )
        if self.measure.unit in (UnitRule.SIGNAL, UnitRule.CHANGE) and not plain_zero:
            refuse_unsaid(value, self.unit, self.values)

    def _shown(self, wanted: Dimension) -> str:
        rule = self.measure.unit
        if rule is UnitRule.RADIAN_PER_SECOND:
            return str(rule.value)
        return self.unit.symbol if rule in _OF_SIGNAL and wanted == self.unit.dimension else str(wanted)

    def _of_span(self, value: Value) -> None:
        names = {node.name for node in value.expression.walk() if isinstance(node, PercentOf)}
        if "span" in names and self.span is None:
            message = f"`{value.as_written}`: the signal has no `span: [low, high]` to take a part of"
            raise Fault(faults.DIMENSION, message, value.place)
        if "change" in names and self.measure.unit is not UnitRule.CHANGE:
            message = f"`{value.as_written}`: {self.measure.name} is not measured in parts of the change"
            raise Fault(faults.DIMENSION, message, value.place)

    def _decibel(self, value: Value) -> None:
        unit = literal_unit(value.expression)
        if unit is not None and unit.kind == "decibel" and self.measure.unit not in _RATIOS:
            message = f"`{value.as_written}`: {self.measure.name} is no ratio that could be in dB"
            raise Fault(faults.DIMENSION, message, value.place)
        if unit is not None and unit.angle and self.measure.unit in _RATIOS:
            message = f"`{value.as_written}`: {self.measure.name} is a ratio, not an angle: give it plain or in dB"
            raise Fault(faults.DIMENSION, message, value.place)

    def _no_cycles(self, value: Value) -> None:
        for node in written_numbers(value.expression, self.values):
            if node.unit is not None and node.unit.frequency and node.unit.pi_power:
                message = f"`{value.as_written}`: {self.measure.name} is in 1/s, not in {node.unit.symbol}"
                raise Fault(faults.DIMENSION, message, value.place)

    def _angle(self, value: Value) -> None:
        written = [node.unit for node in written_numbers(value.expression, self.values)]
        if not any(unit is not None and unit.angle == 1 for unit in written):
            message = f"`{value.as_written}`: {self.measure.name} is an angle: give it in deg or rad"
            raise Fault(faults.DIMENSION, message, value.place)

    def _order(self, limit: Limit) -> None:
        numbers = [self._number(value) for value in limit.values]
        written = ", ".join(value.as_written for value in limit.values)
        if limit.kind == "between" and numbers[0] > numbers[1]:
            raise Fault(faults.VALUE, f"nothing lies between: [{written}]; the lower limit comes first", limit.place)
        if limit.kind == "within" and numbers[0] < 0:
            raise Fault(faults.VALUE, f"`{limit.values[0].as_written}`: a distance is not negative", limit.place)
        if limit.kind == "equals" and (numbers[0].q != 1 or self.measure.unit is not UnitRule.COUNT):
            raise Fault(faults.VALUE, f"`equals: {written}` is for whole numbers that are counted", limit.place)

    def _sign(self, limit: Limit) -> None:
        """Refuse a limit that a value of the wrong sign would meet. Raises Fault."""
        kind = limit.kind
        if not self.measure.sided or kind not in ("at_most", "at_least"):
            return
        number, written = self._number(limit.values[0]), limit.values[0].as_written
        wrong = number > 0 if kind == "at_most" else number < 0
        if wrong and (self.measure.name, kind) not in _ONE_SIDED:
            side = "far below zero" if kind == "at_most" else "far above zero"
            deviation = ", or measure `peak_deviation`" if self.measure.unit is UnitRule.SIGNAL else ""
            raise Fault(
                faults.SIGN,
                f"`{kind}: {written}` is met by a {self.measure.name} {side} as well: write `within: …, of: …` or "
                f"`between: […, …]`{deviation}",
                limit.place,
            )

    def _number(self, value: Value) -> fmpq:
        relative = relative_to_change(value) if self.measure.unit is UnitRule.CHANGE else None
        return evaluate(value, self.values, None, self.span) if relative is None else relative

    # --- arguments ----------------------------------------------------------------------------------------

    def argument(self, name: str, value: Value) -> None:
        """Check an argument by its kind. Raises Fault."""
        kind = next((argument.kind for argument in self.measure.arguments if argument.name == name), None)
        if kind == "band":
            self._band(value)
        elif kind == "fraction":
            self._fraction(name, value)
        elif kind == "time":
            wants(value, _SECOND, self.values)
            if evaluate(value, self.values) < 0:
                raise Fault(faults.VALUE, f"`{value.as_written}`: time counts from the input on", value.place)
        elif kind == "frequency":
            self._frequency(value)

    def over(self, ends: tuple[Value, Value]) -> None:
        """Check a range of frequencies. Raises Fault."""
        for value in ends:
            self._frequency(value)
        if evaluate(ends[0], self.values) > evaluate(ends[1], self.values):
            written = ", ".join(value.as_written for value in ends)
            raise Fault(
                faults.VALUE, f"nothing lies in the range [{written}]: the lower end comes first", ends[0].place
            )

    def mask(self, mask: MaskDefinition) -> None:
        """Check a mask against what it is laid over. Raises Fault."""
        of_response = self.criterion.subject.kind == "response"
        check_mask(mask, self.unit if of_response else None, self.values, spanned=self.span is not None)

    def _frequency(self, value: Value) -> None:
        refuse_written_rate(value, self.values)
        wants(value, _FREQUENCY, self.values)
        if evaluate(value, self.values) < 0:
            raise Fault(faults.VALUE, f"`{value.as_written}`: a frequency is not negative", value.place)

    def _band(self, value: Value) -> None:
        refuse_ambiguous(value, self.unit)
        relative = relative_to_change(value)
        if relative is None:
            self._of_span(value)
            inferred = infer(value, self.values, None, self.unit.dimension)
            if as_dimension(inferred) != self.unit.dimension:
                raise Fault(
                    faults.DIMENSION,
                    f"`{value.as_written}`: a band is in % of the change or in {self.unit.symbol}, "
                    f"this is {shown(value, inferred)}",
                    value.place,
                )
            refuse_unsaid(value, self.unit, self.values)
        if (evaluate(value, self.values, None, self.span) if relative is None else relative) <= 0:
            raise Fault(faults.VALUE, f"`{value.as_written}`: a band is wider than zero", value.place)

    def _fraction(self, name: str, value: Value) -> None:
        fraction = relative_to_change(value)
        if fraction is None or not 0 <= fraction <= 1:
            message = f"`{value.as_written}`: `{name}` is in % of the change, from 0 to 100 %"
            raise Fault(faults.DIMENSION, message, value.place)


def check_requirement(
    requirement: Requirement, signals: Mapping[str, LoopSignals], values: Values, found: Faults
) -> None:
    """Note everything wrong with the limits, arguments and claims of a requirement; `signals` by loop."""
    checks = [
        _check_criterion(signals[criterion.subject.loop], criterion, values, found, requirement.id)
        for criterion in requirement.criteria
    ]
    claimed = requirement.basis.claimed if requirement.basis is not None else None
    usable = [check for check in checks if check is not None]
    if claimed is None or not usable:
        return
    misfits = []
    for check in usable:
        try:
            check.counted(claimed.value)
        except Fault as fault:
            misfits.append(fault)
    if len(misfits) == len(usable) and not misfits[0].repeats:
        found.findings.append(misfits[0].finding(requirement=requirement.id))


def _check_criterion(
    signals: LoopSignals, criterion: Criterion, values: Values, found: Faults, requirement: str
) -> CriterionCheck | None:
    try:
        check = CriterionCheck(signals, criterion, values)
    except Fault:
        return None  # the signal has no unit: said where the loop is checked
    with found.noted(requirement=requirement):
        check.exists()
        check.reference()
    with found.noted(requirement=requirement):
        check.limit()
    for name, value in criterion.arguments.items():
        with found.noted(requirement=requirement):
            check.argument(name, value)
    if criterion.over is not None:
        with found.noted(requirement=requirement):
            check.over(criterion.over)
    if criterion.mask is not None:
        with found.noted(requirement=requirement):
            check.mask(criterion.mask)
    if criterion.basis is not None and criterion.basis.claimed is not None:
        with found.noted(requirement=requirement):
            check.counted(criterion.basis.claimed.value)
    return check
