"""PDF/A-3a and PDF/UA-1 by the rules of veraPDF, where its library is at hand (README.md beside this file)."""

from __future__ import annotations

import os
import re
import shutil
import subprocess
from pathlib import Path

import pytest

JAR = os.environ.get("VERAPDF_JAR", "")
RULES = {"3a": 155, "ua1": 106}
"""How many rules each profile has: a check that loads none must not pass."""

pytestmark = pytest.mark.skipif(
    not Path(JAR).is_file() or shutil.which("java") is None, reason="veraPDF or Java is not at hand"
)


@pytest.mark.parametrize("profile", sorted(RULES))
def test_the_sample_follows_the_standard(sample_pdf: bytes, tmp_path: Path, profile: str) -> None:
    file = tmp_path / "report.pdf"
    file.write_bytes(sample_pdf)
    program = Path(__file__).with_name("Verify.java")
    done = subprocess.run(["java", "-cp", JAR, str(program), profile, str(file)], capture_output=True, text=True)
    assert done.returncode == 0, done.stdout + done.stderr
    counted = re.search(r"compliant=true checks=(\d+) rules=(\d+)", done.stdout)
    assert counted is not None
    assert int(counted[1]) > 10_000
    assert int(counted[2]) == RULES[profile]
