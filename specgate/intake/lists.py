"""Writes the lists inside the project schema from the tables: `python -m specgate.intake.lists`.

Everything else in `schemas/specgate.schema.json` is written by hand. A test compares the file with `rewritten`.
"""

from __future__ import annotations

import json
from importlib.resources import files
from pathlib import Path
from typing import Any

from specgate.approximations.table import APPROXIMATIONS, LATER
from specgate.measures.table import MEASURES
from specgate.terms.units import UnitTable

_SUBJECTS = {"response": "a response", "break": "a break", "loop": "a loop"}


def rewritten(text: str) -> str:
    """Return the text of the schema with its lists made anew."""
    schema = json.loads(text)
    schema["$defs"]["measure"] = _measure()
    schema["$defs"]["measure_arguments"] = {"allOf": [*_subjects(), *_arguments()]}
    schema["$defs"]["approximation"] = _approximation()
    schema["$defs"]["unit"]["examples"] = sorted(UnitTable.standard().units)
    return json.dumps(schema, indent=2, ensure_ascii=False) + "\n"


def _measure() -> dict[str, Any]:
    return {
        "description": "A measure: a number, or a yes or no, read off a response, a break or a loop.",
        "type": "string",
        "enum": list(MEASURES),
        "x-rule": "name-unknown",
        "x-wanted": "a measure",
    }


def _approximation() -> dict[str, Any]:
    return {
        "description": "An approximation of the catalogue. `specgate explain NAME` tells its formula and range.",
        "type": "string",
        "enum": [*APPROXIMATIONS, *LATER],
        "x-rule": "name-unknown",
        "x-wanted": "an approximation",
    }


def _subjects() -> list[dict[str, Any]]:
    """Which measures are read on what the criterion is about."""
    rows = []
    for kind, words in _SUBJECTS.items():
        fitting = [name for name, row in MEASURES.items() if kind in row.subjects]
        say = f"`{{found}}` is not read on {words}: `specgate explain {{found}}` tells where it is"
        then = {"properties": {"measure": {"enum": fitting, "x-say": say}}}
        rows.append({"if": {"required": [kind]}, "then": then})
    return rows


def _arguments() -> list[dict[str, Any]]:
    """Which arguments a measure takes, and which it needs."""
    taking: dict[str, list[str]] = {}
    needing: dict[str, list[str]] = {}
    for name, row in MEASURES.items():
        for argument in row.arguments:
            taking.setdefault(argument.name, []).append(name)
            if argument.required:
                needing.setdefault(argument.name, []).append(name)
    refused = [{"if": _measure_in(names), "else": _refused(key, names)} for key, names in taking.items()]
    needed = [{"if": _measure_in(names), "then": _needed(key, names)} for key, names in needing.items()]
    return refused + needed


def _needed(key: str, names: list[str]) -> dict[str, Any]:
    verb = "needs" if len(names) == 1 else "need"
    return {"required": [key], "x-say": f"`{{missing}}` is missing: {_listed(names)} {verb} it"}


def _refused(key: str, names: list[str]) -> dict[str, Any]:
    say = f"`{key}` does not belong to this measure: it is an argument of {_listed(names)}"
    return {"propertyNames": {"not": {"const": key}, "x-say": say}}


def _measure_in(names: list[str]) -> dict[str, Any]:
    return {"properties": {"measure": {"enum": names}}, "required": ["measure"]}


def _listed(names: list[str]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"


def main() -> None:
    """Rewrite the lists in the schema of the checkout."""
    path = Path(str(files("specgate.schemas") / "specgate.schema.json"))
    path.write_text(rewritten(path.read_text(encoding="utf-8")), encoding="utf-8")


if __name__ == "__main__":
    main()
