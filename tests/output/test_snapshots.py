"""Snapshots survive a kill, go on after it, and end as a file that follows the conventions."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from oceanbox.errors import UnreadableResult
from oceanbox.output.files import part_of, read_dataset
from oceanbox.output.snapshots import Snapshots
from tests.output.conventions import findings_of_strict_cf_check
from tests.output.samples import SNAPSHOT_NAMES, sample_attributes, sample_axes, snapshot_record

APPEND_FOR_EVER = """
import sys, time
from pathlib import Path
from oceanbox.output.snapshots import Snapshots
from tests.output.samples import SNAPSHOT_NAMES, sample_attributes, sample_axes, snapshot_record
axes = sample_axes()
snapshots = Snapshots.create(Path(sys.argv[1]), SNAPSHOT_NAMES, axes, sample_attributes())
for record in range(10_000):
    snapshots.append(10.0 * record, snapshot_record(axes, float(record)))
    print(snapshots.records, flush=True)
    time.sleep(0.01)
"""


@pytest.fixture
def path(tmp_path) -> Path:
    return tmp_path / "snapshots.nc"


def _write(path: Path, count: int) -> Snapshots:
    axes = sample_axes()
    snapshots = Snapshots.create(path, SNAPSHOT_NAMES, axes, sample_attributes())
    for record in range(count):
        snapshots.append(10.0 * record, snapshot_record(axes, float(record)))
    return snapshots


def _kill_after(path: Path, records: int) -> int:
    """Kill a process that appends; returns how many records it said it had written, at least `records`."""
    top = str(Path(__file__).resolve().parents[2])
    environment = os.environ | {"PYTHONPATH": top}
    command = [sys.executable, "-c", APPEND_FOR_EVER, str(path)]
    writer = subprocess.Popen(command, stdout=subprocess.PIPE, text=True, env=environment)
    assert writer.stdout is not None
    written = 0
    while written < records:
        line = writer.stdout.readline()
        assert line, "the writer ended by itself"
        written = int(line)
    os.kill(writer.pid, signal.SIGKILL)
    rest = writer.communicate()[0].split()
    return int(rest[-1]) if rest else written


def test_after_a_kill_every_record_that_was_reported_can_be_read(path):
    written = _kill_after(path, 4)
    assert not path.exists()
    found = read_dataset(part_of(path))
    # One more may have been written whose report the kill cut off.
    assert found.sizes["time"] in (written, written + 1)
    np.testing.assert_array_equal(found["heat_content"], np.arange(found.sizes["time"]))
    np.testing.assert_array_equal(found["velocity_x"][:, 1, 2, 5], np.arange(found.sizes["time"]))


def test_after_a_kill_a_run_goes_on_from_its_restart_point(path):
    _kill_after(path, 4)
    axes = sample_axes()
    with Snapshots.resume(path, records=3) as snapshots:
        for record in range(3, 8):
            snapshots.append(10.0 * record, snapshot_record(axes, 100.0 + record))
        snapshots.finish({})
    found = read_dataset(path)
    np.testing.assert_array_equal(found["time"], 10.0 * np.arange(8))
    np.testing.assert_array_equal(found["thickness"][:, 0, 1, 1], [0, 1, 2, 103, 104, 105, 106, 107])


def test_records_left_over_from_before_a_restart_are_in_no_view_of_the_file(path):
    """The resumed run writes fewer records than the killed one had."""
    _write(path, 6).close()
    axes = sample_axes()
    with Snapshots.resume(path, records=2) as snapshots:
        snapshots.append(15.0, snapshot_record(axes, 50.0))
    assert list(read_dataset(part_of(path))["time"]) == [0.0, 10.0, 15.0]
    with Snapshots.resume(path, records=3) as snapshots:
        snapshots.finish({})
    found = read_dataset(path)
    assert list(found["time"]) == [0.0, 10.0, 15.0]
    np.testing.assert_array_equal(found["temperature"][:, 0, 0, 0], [0.0, 1.0, 50.0])
    assert findings_of_strict_cf_check(path) == ""


def test_left_over_records_are_gone_from_view_as_soon_as_a_run_goes_on(path):
    """Killed again before its first record, a run must not show what an earlier one had written."""
    _write(path, 6).close()
    resume_and_die = (
        "import os, sys; from pathlib import Path; from oceanbox.output.snapshots import Snapshots;"
        "snapshots = Snapshots.resume(Path(sys.argv[1]), records=2); os._exit(9)"
    )
    died = subprocess.run([sys.executable, "-c", resume_and_die, str(path)], check=False)
    assert died.returncode == 9
    assert list(read_dataset(part_of(path))["time"]) == [0.0, 10.0]


def test_a_finished_file_passes_the_strict_check_of_the_cf_conventions(path):
    assert _write(path, 3).finish({"oceanbox_outcome": "reached the end"}) == path
    assert findings_of_strict_cf_check(path) == ""
    assert read_dataset(path).attrs["oceanbox_outcome"] == "reached the end"
    assert not part_of(path).exists()


def test_the_final_name_appears_only_at_the_finish(path):
    snapshots = _write(path, 2)
    assert not path.exists()
    snapshots.finish({})
    assert path.exists()
    assert "oceanbox_valid_records" not in read_dataset(path).attrs


def test_fields_are_single_and_numbers_and_times_double_precision(path):
    _write(path, 1).finish({})
    found = read_dataset(path)
    assert found["thickness"].dtype == np.float32
    assert {found[name].dtype for name in ("heat_content", "time", "x", "cell_area")} == {np.dtype(np.float64)}


def test_double_precision_keeps_every_bit(path):
    axes = sample_axes()
    with Snapshots.create(path, ["thickness"], axes, sample_attributes(), precision="f8") as snapshots:
        value = np.random.default_rng(1).random((2, 4, 5))
        snapshots.append(0.0, {"thickness": value})
        snapshots.finish({})
    np.testing.assert_array_equal(read_dataset(path)["thickness"][0], value)


def test_a_refused_record_leaves_no_trace(path):
    axes = sample_axes()
    good = snapshot_record(axes, 1.0)
    with _write(path, 2) as snapshots:
        for time_days, fields, what in (
            (10.0, good, "time_days"),
            (np.nan, good, "time_days"),
            (20.0, {k: v for k, v in good.items() if k != "thickness"}, "thickness"),
            (20.0, good | {"salinity": good["temperature"]}, "salinity"),
            (20.0, good | {"velocity_x": good["temperature"]}, r"velocity_x: got shape .* dims \(layer, y, x_face\)"),
        ):
            with pytest.raises(ValueError, match=what):
                snapshots.append(time_days, fields)
        assert snapshots.records == 2
    assert read_dataset(part_of(path)).sizes["time"] == 2


def test_going_on_needs_an_unfinished_file_with_enough_records(path):
    with pytest.raises(FileNotFoundError, match=r"snapshots\.nc\.part"):
        Snapshots.resume(path, records=0)
    _write(path, 2).close()
    with pytest.raises(UnreadableResult, match="got 2 records; at least 3"):
        Snapshots.resume(path, records=3)
    part_of(path).write_bytes(b"broken")
    with pytest.raises(UnreadableResult, match="damaged"):
        Snapshots.resume(path, records=0)


def test_an_unknown_variable_is_refused_before_anything_is_written(path):
    with pytest.raises(KeyError, match="thicknes"):
        Snapshots.create(path, ["thicknes"], sample_axes(), sample_attributes())
    assert not part_of(path).exists()
