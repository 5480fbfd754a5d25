"""Names of places inside a report: one for each requirement, audit and loop; different names never meet."""

from __future__ import annotations

import string

_PLAIN = frozenset(string.ascii_letters + string.digits + "_-")


def anchor(kind: str, name: str) -> str:
    """Return the place of `name`: `row-GH-SYS-031`; characters that a link cannot hold become `~hex~`."""
    return f"{kind}-" + "".join(c if c in _PLAIN else f"~{ord(c):x}~" for c in name)


def row(requirement: str) -> str:
    """Return the place of a requirement in the compliance matrix."""
    return anchor("row", requirement)


def audit(requirement: str, number: int) -> str:
    """Return the place of the audit of the basis of a requirement's criterion, counted from 0."""
    return anchor("basis", requirement) + (f"-{number + 1}" if number else "")


def sheet(loop: str) -> str:
    """Return the place of the sheet of a loop."""
    return anchor("loop", loop)


def plot(loop: str, response: str) -> str:
    """Return the place of a response on the sheet of its loop."""
    return anchor("response", f"{loop}.{response}")


def opened(loop: str, name: str) -> str:
    """Return the place of a break on the sheet of its loop."""
    return anchor("break", f"{loop}.{name}")
