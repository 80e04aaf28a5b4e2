"""What holds for all tests: marks by folder, and property tests that no clock can fail."""

from __future__ import annotations

import os
from pathlib import Path
from typing import TYPE_CHECKING

from hypothesis import HealthCheck, settings

if TYPE_CHECKING:
    import pytest

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


def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    """Mark each test by its folder, so that none runs where it should not for want of a mark."""
    for item in items:
        for mark, folder in MARKED_FOLDERS.items():
            if item.path.is_relative_to(folder):
                item.add_marker(mark)
