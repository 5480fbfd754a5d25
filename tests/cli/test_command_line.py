"""The commands as a user runs them: what they print, where, and with which exit status."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import jsonschema
import pytest

from specgate.cli import commands, main, status
from specgate.review.definitions import all_definitions
from specgate.terms.cautions import CAUTIONS

ROOT = Path(__file__).resolve().parents[2]
HELD = str(ROOT / "tests" / "examples" / "spec_format")


def run(*arguments: str, env: dict[str, str] | None = None, cwd: Path = ROOT) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-m", "specgate", *arguments],
        capture_output=True,
        text=True,
        check=False,
        cwd=cwd,
        env={**os.environ, "PYTHONPATH": str(ROOT), **(env or {})},
    )


def test_help_names_every_command_every_status_and_the_cautions() -> None:
    text = " ".join(run("--help").stdout.split())
    for command in commands.COMMANDS.values():
        assert command.name in text
        assert command.summary in text
    for code in ("0", "1", "2", "3", "70"):
        assert f" {code} " in text
    for caution in CAUTIONS:
        assert caution in text


@pytest.mark.parametrize("name", commands.COMMANDS)
def test_every_command_has_help(name: str) -> None:
    done = run(name, "--help")
    assert done.returncode == 0
    assert commands.COMMANDS[name].summary[1:] in " ".join(done.stdout.split())


def test_every_file_of_a_command_is_in_the_table() -> None:
    with_configure = {
        f"specgate.cli.{path.stem}"
        for path in (ROOT / "specgate" / "cli").glob("*.py")
        if "\ndef configure(" in path.read_text()
    }
    assert with_configure == {command.module for command in commands.COMMANDS.values()}


def test_a_new_project_passes_and_is_never_written_over(tmp_path: Path) -> None:
    folder = tmp_path / "first"
    assert run("new", str(folder)).returncode == status.PASSES
    done = run("check", str(folder))
    assert done.returncode == status.PASSES, done.stdout
    before = (folder / "specgate.yaml").read_bytes()
    again = run("new", str(folder))
    assert again.returncode == status.UNUSABLE
    assert "nothing was written" in again.stderr
    assert (folder / "specgate.yaml").read_bytes() == before


def test_a_held_gate_says_so_in_words_and_status() -> None:
    done = run("check", HELD)
    assert done.returncode == status.HOLDS
    first = done.stdout.strip().splitlines()[0]
    assert "hold" in first.lower()
    assert "GH-SYS-031" in done.stdout
    assert "specgate.yaml:" in done.stdout
    assert "\x1b[" not in done.stdout


def test_colour_is_a_choice_and_never_the_only_sign() -> None:
    plain, coloured = run("check", HELD).stdout, run("check", HELD, "--color", "always").stdout
    assert "\x1b[" in coloured
    import re

    assert re.sub(r"\x1b\[[0-9;]*m", "", coloured) == plain


def test_json_is_valid_and_the_same_bytes_each_time() -> None:
    first = run("check", HELD, "--format", "json", env={"PYTHONHASHSEED": "1"})
    second = run("check", HELD, "--format", "json", env={"PYTHONHASHSEED": "2"})
    assert first.stdout == second.stdout
    schema = json.loads((ROOT / "schemas" / "results.schema.json").read_text())
    jsonschema.Draft202012Validator(schema).validate(json.loads(first.stdout))


def test_unusable_input_is_status_2_with_a_place(tmp_path: Path) -> None:
    (tmp_path / "specgate.yaml").write_text("specgate: 1\nproject: {id: A, title: B, revision: C}\nloop: {}\n")
    done = run("check", str(tmp_path))
    assert done.returncode == status.UNUSABLE
    assert "specgate.yaml:3:1" in done.stdout
    assert "loops" in done.stdout  # the nearest name
    as_json = json.loads(run("check", str(tmp_path), "--format", "json").stdout)
    assert as_json["gate"]["outcome"] == "unusable"
    schema = json.loads((ROOT / "schemas" / "results.schema.json").read_text())
    jsonschema.Draft202012Validator(schema).validate(as_json)


@pytest.mark.parametrize(
    "arguments", [("check",), ("chekc", HELD), ("check", HELD, "--format", "xml"), ("report", HELD)]
)
def test_an_unusable_call_is_status_2(arguments: tuple[str, ...]) -> None:
    done = run(*arguments)
    assert done.returncode == status.UNUSABLE
    assert done.stdout == ""


def test_a_project_that_is_not_there_is_status_2(tmp_path: Path) -> None:
    done = run("check", str(tmp_path / "nowhere"))
    assert done.returncode == status.UNUSABLE
    assert "nowhere" in done.stdout


def test_no_report_of_an_unusable_project_and_none_of_another_kind(tmp_path: Path) -> None:
    (tmp_path / "specgate.yaml").write_text("specgate: 1\n")
    target = tmp_path / "report.pdf"
    done = run("report", str(tmp_path), "-o", str(target))
    assert done.returncode == status.UNUSABLE
    assert "no report was written" in done.stderr
    assert not target.exists()
    assert run("report", HELD, "-o", str(tmp_path / "report.docx")).returncode == status.UNUSABLE


def test_a_report_that_cannot_be_written_is_status_3_and_leaves_nothing(tmp_path: Path) -> None:
    done = run("report", HELD, "-o", str(tmp_path / "missing" / "report.html"))
    assert done.returncode == status.ENVIRONMENT
    assert "cannot write" in done.stderr
    assert list(tmp_path.iterdir()) == []


def test_a_report_is_written_though_the_gate_holds(tmp_path: Path) -> None:
    target = tmp_path / "report.html"
    done = run("report", HELD, "-o", str(target))
    assert done.returncode == status.HOLDS
    assert target.read_text().startswith("<!DOCTYPE html>") or target.read_text().startswith("<!doctype html>")
    assert [path.name for path in tmp_path.iterdir()] == ["report.html"]


def test_a_defect_of_the_tool_is_never_taken_for_a_held_gate(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("specgate.cli.judge.judge", lambda project: 1 // 0)
    assert main.main(["check", HELD]) == status.BROKEN


def test_a_reader_that_goes_away_is_no_error() -> None:
    done = subprocess.run(
        f"{sys.executable} -m specgate check {HELD} --format json | head -c 1; exit ${{PIPESTATUS[0]}}",
        shell=True,
        executable="/bin/bash",
        capture_output=True,
        text=True,
        check=False,
        cwd=ROOT,
    )
    assert done.returncode in (status.PIPE_CLOSED, status.HOLDS)
    assert done.stderr == ""


def test_schema_prints_both_schemas() -> None:
    for which, name in (("project", "specgate.schema.json"), ("results", "results.schema.json")):
        assert run("schema", which).stdout == (ROOT / "schemas" / name).read_text()


@pytest.mark.parametrize("name", all_definitions())
def test_every_name_can_be_explained(name: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert main.main(["explain", name]) == status.PASSES
    printed = capsys.readouterr().out
    assert printed.startswith(f"{name} (")
    assert len(printed.splitlines()) >= 3


def test_explain_offers_the_nearest_name(capsys: pytest.CaptureFixture[str]) -> None:
    assert main.main(["explain", "setling_time"]) == status.UNUSABLE
    assert "did you mean settling_time?" in capsys.readouterr().err


def test_proof_is_for_the_machine_readable_result() -> None:
    refused = run("check", HELD, "--proof")
    assert refused.returncode == status.UNUSABLE
    assert "--format json" in refused.stderr
    found = json.loads(run("check", HELD, "--proof", "--format", "json").stdout)
    settling = found["requirements"]["GH-SYS-031"]["criteria"][0]["result"]
    assert settling["proof_record"]["searched_until"] >= settling["value"]


def test_formulas_are_put_to_every_response_where_that_is_asked_for() -> None:
    plain, asked = run("check", HELD).stdout, run("check", HELD, "--formulas").stdout
    assert asked.startswith(plain)
    assert "Formulas on gate_position.follow" in asked.removeprefix(plain)
    found = json.loads(run("check", HELD, "--formulas", "--format", "json", env={"PYTHONHASHSEED": "3"}).stdout)
    jsonschema.Draft202012Validator(json.loads((ROOT / "schemas" / "results.schema.json").read_text())).validate(found)
    follow = found["loops"]["gate_position"]["responses"]["follow"]
    settling = next(row for row in follow["formulas"]["rows"] if row["approximation"] == "second_order_settling")
    assert settling["applies"] is False
    assert settling["failing"][0]["key"] == "separation"
    assert settling["error"]["relative"] == pytest.approx(-0.78, abs=5e-3)
    assert "formulas" not in json.loads(run("check", HELD, "--format", "json").stdout)["loops"]["gate_position"]


EXPIRING = str(ROOT / "tests" / "rule_cases" / "waiver_insufficient" / "enough.yaml")


@pytest.mark.parametrize(("day", "outcome"), [("2026-10-20", 0), ("2026-10-19", 1)])
def test_waivers_are_judged_as_of_the_day_that_is_said(day: str, outcome: int) -> None:
    done = run("check", EXPIRING, "--date", day)
    assert done.returncode == outcome
    assert ("waiver-not-in-force" in done.stdout) is (outcome == 1)


@pytest.mark.parametrize("day", ["2026-13-03", "20261103", "today", ""])
def test_what_is_no_day_is_refused(day: str) -> None:
    done = run("check", EXPIRING, "--date", day)
    assert done.returncode == 2
    assert "2026-11-02" in done.stderr


@pytest.mark.parametrize("kind", ["verification-csv", "allocation-csv", "coverage-csv"])
def test_matrices_go_where_they_are_asked_for(kind: str, tmp_path: Path) -> None:
    target = tmp_path / "matrix.csv"
    done = run("check", HELD, "--format", kind, "-o", str(target))
    assert (done.returncode, done.stdout) == (1, "")
    assert target.read_bytes() == run("check", HELD, "--format", kind).stdout.replace("\n", "\r\n").encode()


def test_a_requirement_is_shown_with_all_that_belongs_to_it() -> None:
    done = run("trace", "GH-SYS-031", HELD)
    assert done.returncode == 0
    for words in ("Above it", "GH-STK-004", "Limits", "Verification", "Rests on", "Findings", "specgate.yaml:"):
        assert words in done.stdout
    assert "Waivers" not in done.stdout


def test_records_and_waivers_of_a_requirement_are_shown() -> None:
    shown = run("trace", "R-2", EXPIRING).stdout
    assert "RC-TR-1, test: 2 s: non-compliant" in shown
    assert "W-2, waiver by Chief engineer, 2026-10-20: Accepted for louvre 2. (in force)" in shown
    assert "non-compliant, waived" in run("trace", "N-1", EXPIRING).stdout


def test_a_requirement_that_there_is_none_of() -> None:
    done = run("trace", "GH-SYS-0311", HELD)
    assert done.returncode == 2
    assert "did you mean GH-SYS-031?" in done.stderr
    assert run("trace", "GH-SYS-031", "nowhere").returncode == 2
