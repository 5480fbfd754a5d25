"""What drives a response, with values: and what of it can be refused before anything is computed."""

from __future__ import annotations

from typing import cast

from flint import fmpq

from specgate.project import faults
from specgate.project.faults import Fault
from specgate.project.parameters import Values, evaluate
from specgate.project.types import Excitation, Response
from specgate.response.inputs import Input, Kind


def evaluated(excitation: Excitation, known: Values) -> Input:
    """Return an input with its values, coherent SI. Raises Fault."""
    quantities = {name: evaluate(value, known) for name, value in excitation.quantities.items()}
    begin = quantities.pop("at", fmpq(0))
    from_end = excitation.options.get("count_from") == "end_of_ramp"
    return Input(cast(Kind, excitation.kind), quantities, begin, from_end)


def check_excitation(excitation: Excitation, known: Values) -> None:
    """See that the quantities of an input fit each other. Raises Fault."""
    for name in ("duration", "frequency"):
        value = excitation.quantities.get(name)
        if value is not None and evaluate(value, known) <= 0:
            raise Fault(faults.VALUE, f"`{value.as_written}`: {_WANTED[name]}", value.place)
    value = excitation.quantities.get("density")
    if value is not None and evaluate(value, known) < 0:
        raise Fault(faults.VALUE, f"`{value.as_written}`: a density is not negative", value.place)
    value = excitation.quantities.get("at")
    if value is not None and evaluate(value, known) < 0:
        raise Fault(faults.VALUE, f"`{value.as_written}`: an input begins at zero or later", value.place)
    if excitation.kind == "ramp_and_hold":
        size, slope = (excitation.quantities[name] for name in ("size", "slope"))
        if evaluate(size, known) * evaluate(slope, known) < 0:
            message = f"`{slope.as_written}` leads away from `{size.as_written}`: slope and size have one sign"
            raise Fault(faults.VALUE, message, slope.place)


_WANTED = {"duration": "a duration is longer than zero", "frequency": "a sine has a frequency above zero"}


def check_together(response: Response) -> None:
    """See that inputs can be driven at once. Raises Fault."""
    if len(response.excitations) > 1:
        for excitation in response.excitations:
            if excitation.kind == "white_noise":
                message = "white noise has no course in time that could be added to that of another input"
                raise Fault(faults.VALUE, message, excitation.place)


__all__ = ["check_excitation", "check_together", "evaluated"]
