"""The two sides of a comparison: what a text on the command line names, read or computed to a result."""

from __future__ import annotations

import os
from dataclasses import dataclass
from pathlib import Path

from specgate.cli.attachments import RESULT, attachments
from specgate.exchange.foreign import Unknown, read_known
from specgate.review.types import Review, Unusable
from specgate.terms.errors import EnvironmentProblem, UnusableProblem

_ESSENTIAL = ("project", "tool", "requirements", "findings", "gate")
"""Parts without which a result cannot be compared with anything."""


@dataclass(frozen=True)
class Side:
    """A side with its result. unknown: what a result of another format does not say; remarks: what is said of that."""

    name: str
    review: Review
    unknown: Unknown = frozenset()
    remarks: tuple[str, ...] = ()


class NotBuilt(Exception):
    """A project, of which `result` says why it could not be built."""

    def __init__(self, name: str, result: Unusable) -> None:
        super().__init__(name)
        self.name = name
        self.result = result


def side(text: str) -> Side:
    """Return the side that a text names: a project, a result, a report, or `REV:path`.

    Raises UnusableProblem where it names nothing that can be read, NotBuilt for a project with errors,
    EnvironmentProblem where what reads it is missing.
    """
    path = Path(text)
    if path.is_dir():
        return _project(text)
    if path.is_file():
        return _file(text, path)
    if ":" in text:
        return _revision(text)
    raise UnusableProblem(
        f"there is no {text}: a project folder, a YAML file, a result (JSON), a report (PDF) or REV:path is wanted"
    )


def _file(text: str, path: Path) -> Side:
    try:
        content = path.read_bytes()
    except OSError as error:
        raise EnvironmentProblem(f"cannot read {text}: {error.strerror or error}") from error
    if content.startswith(b"%PDF-") or path.suffix.lower() == ".pdf":
        return _report(text, content)
    if path.suffix.lower() == ".json" or content.lstrip()[:1] == b"{":
        return _result(text, content)
    return _project(text)


def _project(text: str) -> Side:
    from specgate.cli.judge import judge

    return _of(text, judge(text).review)


def _revision(text: str) -> Side:
    from specgate.cli.git import revision
    from specgate.cli.judge import judge_source
    from specgate.intake.load import ENTRY

    found = revision(text, Path(os.getcwd()))
    return _of(text, judge_source(found.source, found.entry or ENTRY).review)


def _report(text: str, content: bytes) -> Side:
    files = attachments(text, content)
    if RESULT not in files:
        raise UnusableProblem(
            f"{text} carries no {RESULT}: it is no report of specgate, or its attachments were removed"
        )
    return _result(f"{RESULT} in {text}", files[RESULT], text)


def _result(text: str, content: bytes, name: str | None = None) -> Side:
    from specgate.review.build import FORMAT

    try:
        found = read_known(content.decode())
    except (ValueError, RecursionError) as problem:
        raise UnusableProblem(f"{text}: {problem}") from None
    name = name or text
    lacking = [key for kind, key in sorted(found.unknown) if kind == "Review" and key in _ESSENTIAL]
    if lacking:
        raise UnusableProblem(f"{text} is no result that can be compared: `{lacking[0]}` is missing or of another kind")
    fields = found.unknown | found.surplus
    remarks = (_foreign(name, found.format, FORMAT, fields),) if fields or found.format != FORMAT else ()
    whole = _of(name, found.review)
    return Side(name, whole.review, found.unknown, remarks)


def _foreign(name: str, theirs: object, ours: int, fields: Unknown) -> str:
    which = f"format {theirs}" if theirs != ours else f"another version of format {ours}"
    said = f"{name} is a result of {which}, read as far as this version knows it"
    keys = ", ".join(f"`{key}` ({kind})" for kind, key in sorted(fields))
    return f"{said}; not compared: {keys}" if keys else said


def _of(name: str, result: Review | Unusable) -> Side:
    if isinstance(result, Unusable):
        raise NotBuilt(name, result)
    return Side(name, result)
