"""The file of a record is not the one that was recorded.

`digest` is the sha256 of the file when the record was made. Where the project holds the file and its bytes give
another one, the record was changed afterwards, or it is another file: nobody can tell what the verdict rests on. A
file that the project does not hold cannot be checked, which is a note. Put it right by restoring the file, or by
recording it anew.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "record-altered"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every file whose digest is not the recorded one, and every one that is not there."""
    for evidence in facts.project.evidence.values():
        file = evidence.file
        if file is None:
            continue
        if file.found is None:
            message = f"{evidence.id}: {file.path} is not in the project, so that its digest is not checked"
            yield Finding(NAME, Level.NOTE, message, file.place)
        elif file.digest is not None and file.found != file.digest:
            message = (
                f"{evidence.id}: {file.path} is not the file that was recorded: its sha256 is {file.found[:12]}…, and "
                f"{file.digest[:12]}… is stated"
            )
            yield Finding(NAME, Level.ERROR, message, file.place)


RULE = Rule(
    NAME, "File of a record that has changed", "error; note where the file is not in the project", check, __doc__
)
