"""What holds for all tests: marks by folder, property tests that no clock can fail, a spreadsheet or none."""

from __future__ import annotations

import os
import shutil
from pathlib import Path

import pytest
from hypothesis import HealthCheck, settings

TESTS = Path(__file__).parent
MARKED_FOLDERS = {"window": TESTS / "window", "bench": TESTS / "bench"}

# No deadline and no check for slowness: a busy machine fails no test. Under CI the examples stay the same.
settings.register_profile(
    "hingewise",
    deadline=None,
    derandomize=bool(os.environ.get("CI")),
    print_blob=True,
    suppress_health_check=[HealthCheck.too_slow],
)
settings.load_profile("hingewise")


SPREADSHEET = shutil.which("soffice")
NO_SPREADSHEET = (
    "no soffice here: the tests that open and save files with it are deselected; what it made of them is recorded "
    "in tests/analysis/files/spreadsheet and is tested"
)


def pytest_report_header() -> list[str]:
    """Say which tests are left out, and why."""
    return [] if SPREADSHEET else [NO_SPREADSHEET]


def pytest_collection_modifyitems(config: pytest.Config, items: list[pytest.Item]) -> None:
    """Mark each test by its folder, so that none runs where it should not for want of a mark."""
    for item in items:
        for mark, folder in MARKED_FOLDERS.items():
            if item.path.is_relative_to(folder):
                item.add_marker(mark)
    if not SPREADSHEET:
        live = [item for item in items if "live_spreadsheet" in getattr(item, "fixturenames", ())]
        if live:
            items[:] = [item for item in items if item not in live]
            config.hook.pytest_deselected(items=live)


@pytest.fixture(scope="session")
def live_spreadsheet() -> str:
    """The spreadsheet of this machine; a test that asks for it is deselected where there is none."""
    assert SPREADSHEET is not None
    return SPREADSHEET
