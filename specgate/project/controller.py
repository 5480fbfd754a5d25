"""Controllers with proportional, integral and derivative terms.

With e the error, r the set point, y the measurement, and a derivative lag Tf (none: an ideal derivative):

- parallel: u = Kp e + Ki e/s + Kd s/(1 + Tf s) e
- standard: u = K [(b r - y) + e/(Ti s) + Td s/(1 + Tf s) (e or -y)]
- series:   u = K [(b + 1/(Ti s)) F r - (1 + 1/(Ti s)) (1 + Td s)/(1 + Tf s) y], where F is (1 + Td s)/(1 + Tf s),
  or 1 with the derivative on the measurement

A set-point weight b or a derivative on the measurement needs two inputs: `set_point` and `measurement`, or, under
other names, the set point first.
"""

from __future__ import annotations

from collections.abc import Mapping
from functools import partial

from flint import fmpq, fmpq_poly

from specgate.project import faults
from specgate.project.faults import Fault
from specgate.project.fit import plain_gain
from specgate.project.rational_forms import Rational
from specgate.project.reader import ModelReader, S
from specgate.project.types import PidModel
from specgate.terms.dimensions import DIMENSIONLESS, TIME
from specgate.terms.expressions import PLAIN
from specgate.terms.records import record

_ONE, _ZERO = fmpq_poly([1]), fmpq(0)
_TIMES = ("integral_time", "derivative_time", "derivative_lag")
_GAINS = {"proportional": 0, "integral": -1, "derivative": 1, "gain": 0}
"""Power of time in the dimension of a gain, beside that of output over input."""


@record
class _Action:
    """What acts on the set point, and with a minus sign on the measurement, over one denominator."""

    set_point: fmpq_poly
    measurement: fmpq_poly
    denominator: fmpq_poly


def controller(reader: ModelReader, model: PidModel) -> Rational:
    """Read a controller. A term that is given as zero counts as left out. Raises Fault."""
    output, inputs = _ports(reader)
    scale = _dimensions(reader, model, output, inputs[0])
    numbers = {name: reader.number(value) for name, value in model.terms.items()}
    _refuse_empty(reader, model, numbers)
    action = _FORMS[model.form](numbers, model.derivative_on == "measurement")
    if len(inputs) == 2:
        set_point, measurement = inputs
        numerators = {
            (output, set_point): action.set_point * scale,
            (output, measurement): -action.measurement * scale,
        }
        return Rational(numerators, action.denominator)
    if numbers.get("set_point_weight", 1) != 1 or model.derivative_on == "measurement":
        raise Fault(
            faults.VALUE,
            "a set-point weight or a derivative on the measurement needs two inputs, `set_point` and `measurement`",
            reader.subsystem.model_place,
        )
    return Rational({(output, inputs[0]): action.set_point * scale}, action.denominator)


def _refuse_empty(reader: ModelReader, model: PidModel, numbers: Mapping[str, fmpq]) -> None:
    """Refuse what would silently drop or break a term. Raises Fault."""
    if numbers.get("integral_time") == 0:
        value = model.terms["integral_time"]
        message = f"`{value.as_written}`: an integral time of zero is no controller; leave it out"
        raise Fault(faults.VALUE, message, value.place)
    if "derivative_lag" in numbers and not {"derivative", "derivative_time"} & set(numbers):
        message = "there is a derivative lag, but no derivative term for it"
        raise Fault(faults.VALUE, message, model.terms["derivative_lag"].place)


def _ports(reader: ModelReader) -> tuple[str, tuple[str, ...]]:
    """Return the output, and the error or the set point and the measurement."""
    outputs, inputs = tuple(reader.subsystem.outputs), tuple(reader.subsystem.inputs)
    if len(outputs) != 1 or len(inputs) > 2:
        message = "a controller has one output, and as input the error, or a set point and a measurement"
        raise Fault(faults.VALUE, message, reader.subsystem.model_place)
    if set(inputs) == {"set_point", "measurement"}:
        inputs = ("set_point", "measurement")
    if len(inputs) == 2:
        first, second = (reader.subsystem.inputs[name].unit for name in inputs)
        if (first.factor, first.pi_power, first.dimension) != (second.factor, second.pi_power, second.dimension):
            message = f"set point and measurement are in one unit, not in `{first.symbol}` and `{second.symbol}`"
            raise Fault(faults.DIMENSION, message, reader.subsystem.model_place)
    return outputs[0], inputs


def _dimensions(reader: ModelReader, model: PidModel, output: str, source: str) -> fmpq:
    """Check the dimensions of all terms; return what plain gains are multiplied by."""
    ratio = reader.ratio(output, source)
    gains = {name: value for name, value in model.terms.items() if name in _GAINS}
    plain = all(reader.infer(value) is PLAIN for value in gains.values())
    for name, value in model.terms.items():
        if name in _TIMES:
            reader.wants(value, TIME, "a time of a controller", plain_as="s")
        elif name == "set_point_weight":
            reader.wants(value, DIMENSIONLESS, "a set-point weight")
        elif not plain:
            time = TIME ** _GAINS[name]
            reader.wants(value, ratio * time, f"`{name}`", name=partial(reader.shown_ratio, output, source, time))
    if not plain:
        return fmpq(1)
    reader.by_fit = reader.by_fit or ratio != DIMENSIONLESS or any(_GAINS[name] for name in gains)
    return plain_gain(reader, (output, source), ratio, reader.conversion(output, source))


def _parallel(numbers: Mapping[str, fmpq], on_measurement: bool) -> _Action:
    integral, derivative = numbers.get("integral", _ZERO), numbers.get("derivative", _ZERO)
    over, lag = S if integral else _ONE, _lag(numbers, derivative)
    steady = over * lag * numbers.get("proportional", _ZERO) + lag * integral
    changing = over * S * derivative
    return _Action(steady if on_measurement else steady + changing, steady + changing, over * lag)


def _standard(numbers: Mapping[str, fmpq], on_measurement: bool) -> _Action:
    gain, derivative = numbers["gain"], numbers.get("derivative_time", _ZERO)
    (over, integral), lag = _integral(numbers), _lag(numbers, derivative)
    weighted = over * lag * numbers.get("set_point_weight", fmpq(1)) + integral * lag
    changing = over * S * derivative
    set_point = weighted if on_measurement else weighted + changing
    measurement = over * lag + integral * lag + changing
    return _Action(set_point * gain, measurement * gain, over * lag)


def _series(numbers: Mapping[str, fmpq], on_measurement: bool) -> _Action:
    gain, derivative = numbers["gain"], numbers.get("derivative_time", _ZERO)
    (over, integral), lag = _integral(numbers), _lag(numbers, derivative)
    lead = fmpq_poly([1, derivative])
    weighted = over * numbers.get("set_point_weight", fmpq(1)) + integral
    set_point = weighted * (lag if on_measurement else lead)
    return _Action(set_point * gain, (over + integral) * lead * gain, over * lag)


def _integral(numbers: Mapping[str, fmpq]) -> tuple[fmpq_poly, fmpq_poly]:
    """Return denominator and numerator of 1/(Ti s); 1 and 0 without an integral term."""
    if "integral_time" not in numbers:
        return _ONE, fmpq_poly()
    return S * numbers["integral_time"], _ONE


def _lag(numbers: Mapping[str, fmpq], derivative: fmpq) -> fmpq_poly:
    """Return 1 + Tf s where there is a derivative term."""
    return fmpq_poly([1, numbers.get("derivative_lag", _ZERO)]) if derivative else _ONE


_FORMS = {"parallel": _parallel, "standard": _standard, "series": _series}
