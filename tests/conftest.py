"""What tests of all rooms share. No test asserts on time: a busy machine would fail it (timings: tests/benchmarks)."""

from __future__ import annotations

import faulthandler
import sys
from collections.abc import Callable
from types import FrameType

import pytest
from hypothesis import HealthCheck, settings

HANGS = 600
"""Seconds after which an action hangs, on the slowest of machines."""

# hypothesis fails a test by the clock in two ways of its own
settings.register_profile("no_clock", deadline=None, suppress_health_check=[HealthCheck.too_slow])
settings.load_profile("no_clock")

Work = Callable[[Callable[[], object]], int]


def _work(action: Callable[[], object]) -> int:
    calls = 0

    def count(frame: FrameType, event: str, argument: object) -> None:
        nonlocal calls
        calls += event in ("call", "c_call")

    before = sys.getprofile()
    # a single call into a library can be what does not end, which nothing but another thread can see
    faulthandler.dump_traceback_later(HANGS, exit=True, file=sys.__stderr__)
    sys.setprofile(count)
    try:
        action()
    finally:
        sys.setprofile(before)
        faulthandler.cancel_dump_traceback_later()
    return calls


@pytest.fixture(scope="session")
def work() -> Work:
    """Count the function calls that an action makes, the same on every machine; the process is killed if it hangs."""
    return _work
