from __future__ import annotations

import importlib.util
import os
import shutil
import sys
from collections.abc import Callable
from pathlib import Path
from types import ModuleType

import pytest


@pytest.fixture(scope="session")
def sample() -> ModuleType:
    """The hand-written Review beside this file."""
    name = "tests_report_sample"
    spec = importlib.util.spec_from_file_location(name, Path(__file__).with_name("sample.py"))
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules[name] = module
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="session")
def tool() -> Callable[[str], str]:
    """Return the path of a program of the machine; without it a test is skipped, but not where CI is set."""

    def find(name: str) -> str:
        path = shutil.which(name)
        if path is None:
            message = f"{name} is not on this machine (apt-get install poppler-utils qpdf)"
            if os.environ.get("CI"):
                pytest.fail(message)
            pytest.skip(message)
        return path

    return find


ATTACHMENTS = {"specgate.yaml": b"specgate: 1\n", "subsystems/air.yaml": b"subsystems: {}\n", "results.json": b"{}\n"}


@pytest.fixture(scope="session")
def attached() -> dict[str, bytes]:
    """Files that go into the sample's PDF."""
    return dict(ATTACHMENTS)


@pytest.fixture(scope="session")
def sample_pdf(sample: ModuleType, attached: dict[str, bytes]) -> bytes:
    """The sample as a PDF."""
    from specgate.report import pdf

    return pdf.render(sample.review(), attached)


@pytest.fixture(scope="session")
def sample_html(sample: ModuleType) -> str:
    """The sample as an HTML document."""
    from specgate.report import html

    return html.render(sample.review())
