"""A file under its final name is always whole."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
import xarray as xr

from oceanbox.errors import UnreadableResult
from oceanbox.output.files import part_of, read_dataset, whole_file, write_dataset
from tests.output.samples import full_result

WRITE_SLOWLY = """
import sys, time
from pathlib import Path
from oceanbox.output.files import whole_file
with whole_file(Path(sys.argv[1])) as part:
    part.write_bytes(b"half a file")
    Path(sys.argv[2]).touch()
    time.sleep(60)
"""


def _kill_while_writing(path: Path, signal_file: Path) -> None:
    """Start a writer, wait until it has written half of its file, and kill it."""
    writer = subprocess.Popen([sys.executable, "-c", WRITE_SLOWLY, str(path), str(signal_file)])
    deadline = time.monotonic() + 60.0
    while not signal_file.exists():
        assert writer.poll() is None and time.monotonic() < deadline, "the writer never began"
        time.sleep(0.01)
    os.kill(writer.pid, signal.SIGKILL)
    writer.wait()


def test_a_killed_writer_leaves_nothing_under_the_final_name(tmp_path):
    path = tmp_path / "result.nc"
    _kill_while_writing(path, tmp_path / "begun")
    assert not path.exists()
    assert part_of(path).exists()


def test_a_killed_writer_leaves_the_old_file_as_it_was(tmp_path):
    path = tmp_path / "result.nc"
    dataset = full_result().assemble()
    write_dataset(dataset, path)
    before = path.read_bytes()
    _kill_while_writing(path, tmp_path / "begun")
    assert path.read_bytes() == before
    write_dataset(dataset, path)  # the part left behind is no obstacle
    assert not part_of(path).exists()


def test_an_error_while_writing_leaves_the_old_file_and_no_part(tmp_path):
    path = tmp_path / "text"
    path.write_text("old")
    with pytest.raises(RuntimeError), whole_file(path) as part:
        part.write_text("new")
        raise RuntimeError
    assert path.read_text() == "old"
    assert not part_of(path).exists()


def test_a_reader_that_opened_the_old_file_is_not_disturbed(tmp_path):
    path = tmp_path / "result.nc"
    dataset = full_result().assemble()
    write_dataset(dataset, path)
    with xr.open_dataset(path, engine="netcdf4", decode_times=False) as old:
        write_dataset(dataset * 0.0, path)
        assert (old["thickness"].values == dataset["thickness"].values).all()
    assert (read_dataset(path)["thickness"] == 0.0).all()


def test_a_missing_or_damaged_file_is_named(tmp_path):
    path = tmp_path / "result.nc"
    with pytest.raises(FileNotFoundError, match=r"result\.nc"):
        read_dataset(path)
    write_dataset(full_result().assemble(), path)
    whole = path.read_bytes()
    for damaged in (whole[: len(whole) // 2], b"", b"no NetCDF at all"):
        path.write_bytes(damaged)
        with pytest.raises(UnreadableResult, match=r"result\.nc: cannot be read: damaged"):
            read_dataset(path)
