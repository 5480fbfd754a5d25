"""Something wrong in a project that has been read: what the checks collect and the builders refuse."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager

from specgate.terms.findings import Finding, Related
from specgate.terms.places import Place
from specgate.terms.verdicts import Level

DIMENSION = "dimension-mismatch"
NAME = "name-unknown"
SIGN = "sign-ambiguous-limit"
VALUE = "schema-violation"


class Fault(Exception):
    """A project that cannot be built, and where. `repeats`: it only follows from another fault that is said itself."""

    def __init__(self, rule: str, message: str, place: Place, *related: Related, repeats: bool = False) -> None:
        super().__init__(message)
        self.rule, self.message, self.place, self.related, self.repeats = rule, message, place, related, repeats

    def finding(self, **about: str | None) -> Finding:
        """Return it as a finding; `about` may name the requirement, loop, response or subsystem concerned."""
        return Finding(self.rule, Level.ERROR, self.message, self.place, related=self.related, **about)  # type: ignore[arg-type]


class Faults:
    """Takes faults on the way, so that one does not hide the next; `repeated` counts those that only follow."""

    def __init__(self) -> None:
        self.findings: list[Finding] = []
        self.repeated = 0

    @property
    def count(self) -> int:
        """How many faults there were, those that only follow from others included."""
        return len(self.findings) + self.repeated

    @contextmanager
    def noted(self, **about: str | None) -> Iterator[None]:
        """Run the body up to its first fault and note that."""
        try:
            yield
        except Fault as fault:
            if fault.repeats:
                self.repeated += 1
            else:
                self.findings.append(fault.finding(**about))
