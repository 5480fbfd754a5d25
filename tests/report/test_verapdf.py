"""PDF/A-3a and PDF/UA-1 by the rules of veraPDF, where its library is at hand (README.md beside this file)."""

from __future__ import annotations

import os
import re
import shutil
import subprocess
from pathlib import Path
from types import ModuleType

import pytest

from specgate.report.revisions import paper
from specgate.review.types import ToolReview
from specgate.revisions.compare import differences

JAR = os.environ.get("VERAPDF_JAR", "")
RULES = {"3a": 155, "ua1": 106}
"""How many rules each profile has: a check that loads none must not pass."""

pytestmark = pytest.mark.skipif(
    not Path(JAR).is_file() or shutil.which("java") is None, reason="veraPDF or Java is not at hand"
)


@pytest.fixture(scope="module")
def differences_pdf(sample: ModuleType) -> bytes:
    """The differences of two samples, on paper."""
    return paper.render(differences(sample.review(), sample.small(), ToolReview("specgate", "0")), b"{}")


@pytest.mark.parametrize("document", ["sample_pdf", "differences_pdf"])
@pytest.mark.parametrize("profile", sorted(RULES))
def test_the_sample_follows_the_standard(
    request: pytest.FixtureRequest, tmp_path: Path, profile: str, document: str
) -> None:
    file = tmp_path / "report.pdf"
    file.write_bytes(request.getfixturevalue(document))
    program = Path(__file__).with_name("Verify.java")
    done = subprocess.run(["java", "-cp", JAR, str(program), profile, str(file)], capture_output=True, text=True)
    assert done.returncode == 0, done.stdout + done.stderr
    counted = re.search(r"compliant=true checks=(\d+) rules=(\d+)", done.stdout)
    assert counted is not None
    assert int(counted[1]) > 10_000
    assert int(counted[2]) == RULES[profile]
