"""Write what the mutations come to into their tables: to be run on purpose only, and every line of it to be read.

python -m tests.mutations.write
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

import yaml

from tests.mutations.workshop import Mutation, Workshop, mutations, told

HERE = Path(__file__).resolve().parent
TABLES = {"survey_airship": "survey_airship/rev_b", "pilot_fermenter": "pilot_fermenter/rev_b"}


def written(rows: tuple[Mutation, ...]) -> Iterator[str]:
    for row in rows:
        yield f"- name: {_text(row.name)}\n"
        for key in ("file", "after", "old", "new"):
            yield f"  {key}: {_text(getattr(row, key))}\n"
        yield "  expect:\n" if row.expect else "  expect: []\n"
        yield from (f"    - {_text(line)}\n" for line in row.expect)


def _text(value: str) -> str:
    return str(yaml.safe_dump(value, default_style='"', width=10_000, allow_unicode=True)).strip()


if __name__ == "__main__":
    for table, example in TABLES.items():
        path, workshop = HERE / f"{table}.yaml", Workshop(example)
        rows = tuple(replace(row, expect=tuple(told(workshop.mutated(row)))) for row in mutations(path))
        path.write_text("".join(written(rows)))
