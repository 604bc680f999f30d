"""Scalars follow the YAML 1.2 core schema, whose table (YAML 1.2.2, section 10.3.2) is repeated here by example."""

from typing import Any

import pytest
import yaml

from oceanbox.config.yaml_tree import CoreDumper, plain, read_tree
from oceanbox.errors import Fault

SCALARS: dict[str, Any] = {
    "1e-7": 1.0e-7,
    "1e7": 1.0e7,
    "1.0e-7": 1.0e-7,
    "-1E+3": -1000.0,
    ".5": 0.5,
    "6.": 6.0,
    "010": 10,
    "0o17": 15,
    "0x1F": 31,
    "-3": -3,
    "+3": 3,
    ".inf": float("inf"),
    "-.INF": float("-inf"),
    "~": None,
    "null": None,
    "": None,
    "true": True,
    "False": False,
    "on": "on",
    "no": "no",
    "yes": "yes",
    "12:30:00": "12:30:00",
    "2001-01-01": "2001-01-01",
    "1_000": "1_000",
    "0b1": "0b1",
    "1e": "1e",
    "nan": "nan",
    "'1e-7'": "1e-7",
    '"null"': "null",
    "=": "=",
}


def value_of(text: str) -> Any:
    faults: list[Fault] = []
    tree = read_tree(f"key: {text}\n", "text", faults)
    assert tree is not None and not faults
    return plain(tree)["key"]


@pytest.mark.parametrize(("text", "value"), SCALARS.items())
def test_scalars_are_read_by_the_core_schema(text: str, value: Any) -> None:
    got = value_of(text)
    assert got == value and type(got) is type(value)


def test_not_a_number_is_read_as_such() -> None:
    got = value_of(".nan")
    assert got != got


@pytest.mark.parametrize("text", [text for text in SCALARS if not text.startswith(("'", '"'))])
def test_text_that_looks_like_another_scalar_is_written_so_that_it_stays_text(text: str) -> None:
    written = yaml.dump({"key": text}, Dumper=CoreDumper)
    tree = read_tree(written, "text", [])
    assert tree is not None and plain(tree) == {"key": text}
