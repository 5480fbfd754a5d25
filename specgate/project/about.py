"""What a criterion is about, as far as the project's files tell: signal, unit, what drives the response."""

from __future__ import annotations

from flint import fmpq

from specgate.project import faults
from specgate.project.faults import Fault
from specgate.project.signals import LoopSignals
from specgate.project.types import Response, Subject
from specgate.terms.unit import ONE, Unit


class About:
    """The subject of a criterion; a loop, response or signal that is not there has been reported.

    signals: None where there is no such loop.
    """

    def __init__(self, subject: Subject, signals: LoopSignals | None) -> None:
        self.subject, self.signals = subject, signals

    @property
    def of_response(self) -> bool:
        """Whether a response is looked at, not a break or a whole loop."""
        return self.subject.kind == "response"

    @property
    def response(self) -> Response | None:
        """Return the response, if there is one and it could be read."""
        if self.signals is None or not self.of_response or self.subject.name is None:
            return None
        return self.signals.loop.responses.get(self.subject.name)

    @property
    def unit(self) -> Unit:
        """Return the unit of the signal, 1 for a break or a loop. Raises Fault, a repeating one where it is unknown."""
        if not self.of_response:
            return ONE
        return self._signals().unit(self._response().to)

    @property
    def span(self) -> fmpq | None:
        """Return the span of the signal, None without one. Raises Fault."""
        return self._signals().span(self._response().to) if self.of_response else None

    @property
    def kind(self) -> str | None:
        """Return the kind of the input, `several` for several; None for a break or a loop, or where it is unknown."""
        response = self.response
        if response is None:
            return None
        return response.excitations[0].kind if len(response.excitations) == 1 else "several"

    @property
    def error_from(self) -> tuple[str, Unit] | None:
        """Return the only input, from which an error is measured unless a reference is named. Raises Fault."""
        response = self.response
        if response is None or response.reference is not None or len(response.excitations) != 1:
            return None
        source = response.excitations[0].source
        return source, self._signals().unit(source)

    def _response(self) -> Response:
        response = self.response
        if response is None:
            raise self._unknown()
        return response

    def _signals(self) -> LoopSignals:
        if self.signals is None:
            raise self._unknown()
        return self.signals

    def _unknown(self) -> Fault:
        message = f"there is no {self.subject.kind} `{self.subject.loop}.{self.subject.name}`"
        return Fault(faults.NAME, message, self.subject.place, repeats=True)
