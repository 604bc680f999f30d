"""What a person is told while something runs: all that is known, and no words about what is not."""

from __future__ import annotations

import math

import pytest

from oceanbox import study_progress, terminal
from oceanbox.experiment.running import Progress
from oceanbox.study.executing import StudyProgress


def run_at(days: float, heat_imbalance: float = math.nan) -> Progress:
    return Progress(days, 36525.0, int(days), None, heat_imbalance, "")


def test_before_a_case_has_ended_nothing_is_said_of_the_time_left() -> None:
    assert study_progress.words(StudyProgress(6, 0, 0, 0, ("a", "b"), math.nan)) == "0 of 6 done; 2 running: a, b"
    later = study_progress.words(StudyProgress(6, 0, 2, 0, ("c",), 75.0))
    assert later == "2 of 6 done; 1 running: c; 1 min 15 s left"


def test_a_run_says_nothing_of_a_pace_it_does_not_have(
    capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    clock = iter((0.0, 20.0, 40.0))
    monkeypatch.setattr("oceanbox.terminal.time.monotonic", lambda: next(clock))
    tell = terminal._LogLines()
    tell(run_at(365.25))
    tell(run_at(730.5, heat_imbalance=0.02))
    # a year in the 20 s since the first report, 98 of them to go; what was before was compiling
    assert capsys.readouterr().err.splitlines() == [
        "year 1.0 of at most 100, step 365",
        "year 2.0 of at most 100, step 730, heat imbalance 2.0 %; at most 32:40 left",
    ]
