"""Frequencies at which a sampled loop says nothing new: above half its rate the opened loop repeats itself."""

from __future__ import annotations

from specgate.project import faults
from specgate.project.about import About
from specgate.project.faults import Fault
from specgate.project.parameters import Values, evaluate
from specgate.project.signals import calls
from specgate.project.types import SampledModel, Value


def refuse_above_half_the_rate(frequency: Value, about: About, values: Values) -> None:
    """Refuse a frequency beyond pi/T at a break of a loop that is sampled with the period T. Raises Fault."""
    if about.signals is None or about.of_response:
        return
    subsystems = about.signals.project.subsystems
    used = {call.subsystem for signal in about.signals.loop.signals.values() for call in calls(signal.expression)}
    for name in sorted(used & subsystems.keys()):
        model = subsystems[name].model
        if not isinstance(model, SampledModel):
            continue
        period = evaluate(model.period, values, name)
        if period > 0 and evaluate(frequency, values) * period > values.pi:
            highest = values.pi / period
            raise Fault(
                faults.VALUE,
                f"`{frequency.as_written}` is above half the rate at which `{name}` samples, "
                f"{int(highest.p) / int(highest.q):.4g} rad/s: there the opened loop only repeats itself",
                frequency.place,
            )
