"""What a Review holds beyond what its verdicts need."""

from __future__ import annotations

from specgate.terms.records import record


@record
class Wanted:
    """What is computed only where somebody asks for it.

    drawn: what drawings and records show: points of responses, of opened loops and of errors, and peaks of signals that
    a bound alone proves to be inside their range. proof: how every bounded result was obtained. formulas: every formula
    of the catalogue against every response, break and loop.
    """

    drawn: bool = True
    proof: bool = False
    formulas: bool = False
