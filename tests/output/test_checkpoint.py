"""A restart point comes back bit for bit, or not at all."""

from __future__ import annotations

import math
import struct
import tempfile
from pathlib import Path

import hypothesis.extra.numpy as arrays_of
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from oceanbox.errors import UnreadableResult
from oceanbox.output.checkpoint import load_checkpoint, save_checkpoint
from oceanbox.output.files import part_of, write_dataset
from tests.output.samples import full_result

SHAPES = arrays_of.array_shapes(min_dims=0, max_dims=3, min_side=0, max_side=4)
FLOATS = arrays_of.arrays(np.float64, SHAPES)
INTEGERS = arrays_of.arrays(np.int64, SHAPES)
NAMES = st.from_regex(r"[a-z][a-z0-9_]{0,12}", fullmatch=True)
ATTRIBUTES = st.dictionaries(st.text(), st.text() | st.integers() | st.floats())


def _bits(value: str | int | float) -> object:
    """Equal for equal bits: 0.0 differs from -0.0 and from 0. All NaN are one: the bits of one are kept in arrays only."""
    if isinstance(value, float):
        return "NaN" if math.isnan(value) else struct.pack("d", value)
    return type(value), value


@settings(max_examples=60, deadline=None)
@given(st.dictionaries(NAMES, FLOATS | INTEGERS, max_size=4), ATTRIBUTES)
def test_a_restart_point_comes_back_bit_for_bit(arrays, attributes):
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "restart.nc"
        save_checkpoint(path, arrays, attributes)
        loaded, found = load_checkpoint(path)
    assert set(loaded) == set(arrays)
    for name, array in arrays.items():
        assert (loaded[name].dtype, loaded[name].shape) == (array.dtype, array.shape)
        assert loaded[name].tobytes() == array.tobytes()
    assert {k: _bits(v) for k, v in found.items()} == {k: _bits(v) for k, v in attributes.items()}


def test_values_that_files_often_lose_are_kept(tmp_path):
    """NetCDF's own fill values, negative zero, a NaN with a payload, the smallest denormal, the extreme integers."""
    odd_nan = struct.unpack("d", struct.pack("Q", 0x7FF8000000000123))[0]
    arrays = {
        "floats": np.array([9.969209968386869e36, -0.0, odd_nan, 5e-324, np.inf, -np.inf]),
        "integers": np.array([-(2**63), 2**63 - 1, -9223372036854775806]),
        "scalar": np.array(np.nan),
        "empty": np.empty((3, 0, 2)),
        "strided": np.arange(12.0).reshape(3, 4).T[::-2],
    }
    save_checkpoint(tmp_path / "restart.nc", arrays, {"text": "", "long": "x" * 100_000})
    loaded, attributes = load_checkpoint(tmp_path / "restart.nc")
    assert {n: a.tobytes() for n, a in loaded.items()} == {n: a.tobytes() for n, a in arrays.items()}
    assert {n: a.shape for n, a in loaded.items()} == {n: a.shape for n, a in arrays.items()}
    assert attributes == {"text": "", "long": "x" * 100_000}


@pytest.fixture
def saved(tmp_path) -> Path:
    rng = np.random.default_rng(3)
    save_checkpoint(tmp_path / "restart.nc", {"h": rng.random((20, 30))}, {"step": 12})
    return tmp_path / "restart.nc"


def test_a_flipped_bit_in_the_data_is_noticed(saved):
    value = load_checkpoint(saved)[0]["h"][7, 7].tobytes()
    whole = bytearray(saved.read_bytes())
    place = whole.find(value)
    assert place > 0, "the value is not stored plainly"
    whole[place] ^= 1
    saved.write_bytes(whole)
    with pytest.raises(UnreadableResult, match="damaged"):
        load_checkpoint(saved)


@pytest.mark.parametrize("fraction", [0.0, 0.1, 0.5, 0.99])
def test_a_truncated_file_is_a_clear_error(saved, fraction):
    whole = saved.read_bytes()
    saved.write_bytes(whole[: int(fraction * len(whole))])
    with pytest.raises(UnreadableResult, match=r"restart\.nc.*damaged.*start from"):
        load_checkpoint(saved)


def test_another_netcdf_file_is_not_taken_for_a_restart_point(tmp_path):
    write_dataset(full_result().assemble(), tmp_path / "result.nc")
    with pytest.raises(UnreadableResult, match="not a restart point"):
        load_checkpoint(tmp_path / "result.nc")


def test_a_missing_restart_point_is_a_missing_file(tmp_path):
    with pytest.raises(FileNotFoundError, match=r"restart\.nc"):
        load_checkpoint(tmp_path / "restart.nc")


@pytest.mark.parametrize(
    ("arrays", "attributes", "error"),
    [
        ({"h": np.zeros(2, dtype=np.float32)}, {}, TypeError),
        ({"h": [1.0, 2.0]}, {}, TypeError),
        ({"state/h": np.zeros(2)}, {}, ValueError),
        ({"h": np.zeros(2)}, {"flag": True}, TypeError),
    ],
)
def test_what_cannot_be_kept_exactly_is_refused_and_the_old_restart_point_stays(saved, arrays, attributes, error):
    before = saved.read_bytes()
    with pytest.raises(error):
        save_checkpoint(saved, arrays, attributes)
    assert saved.read_bytes() == before
    assert not part_of(saved).exists()
