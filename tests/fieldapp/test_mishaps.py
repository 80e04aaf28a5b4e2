"""The log of mishaps: what went wrong is written down, and writing it never raises."""

from __future__ import annotations

from datetime import UTC, datetime

import pytest

from fieldapp.mishaps import MOST_BYTES, MishapLog

AT = datetime(2026, 5, 4, 12, 30, tzinfo=UTC)


def test_a_mishap_is_written_with_its_time_and_trace(tmp_path):
    """The log holds the time, the kind of error and where it came from."""
    log = MishapLog(tmp_path / "mishaps.log", lambda: AT)
    with pytest.raises(ZeroDivisionError) as caught:
        _ = 1 / 0
    assert log.write(caught.value)
    assert "2026-05-04T12:30:00+00:00" in log.text()
    assert "ZeroDivisionError" in log.text()
    assert "test_mishaps.py" in log.text()


def test_a_log_that_cannot_be_written_does_not_raise(tmp_path):
    """Where the folder is not there the log says so by its answer."""
    log = MishapLog(tmp_path / "nowhere" / "mishaps.log", lambda: AT)
    assert not log.write(ValueError("x"))
    assert log.text() == ""


def test_a_long_log_starts_anew(tmp_path):
    """A log beyond its limit is set aside once and begun again."""
    path = tmp_path / "mishaps.log"
    path.write_text("x" * (MOST_BYTES + 1), encoding="utf-8")
    log = MishapLog(path, lambda: AT)
    assert log.write(ValueError("anew"))
    assert log.text().startswith("2026")
    assert (tmp_path / "mishaps.old.log").exists()
