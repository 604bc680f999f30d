"""Every key has a sentence, a unit that its name ends in, and a default that it may hold."""

import json
import re

import cf_units
import pytest

from oceanbox import config
from oceanbox.config.fields import FIELD_KINDS
from oceanbox.config.reference import KeyReference, field_keys, json_schema, reference_keys, reference_text
from oceanbox.config.section import FIELD_UNIT
from oceanbox.errors import ConfigError

KEYS = reference_keys()
ALL_KEYS = (*KEYS, *field_keys())

SYMBOLS = {"km", "m", "s", "K", "degC", "kg", "g", "W", "N", "J", "PW", "day", "days", "year", "years", "deg"}
TOKEN = re.compile(r"([A-Za-z]+)(\d?)")


def unit_in_name(name: str) -> str:
    """The unit at the end of a key, as 'velocity_m_per_day' -> 'm day-1'; '' where the key ends in none."""
    run: list[str] = []
    for piece in reversed(name.split("_")):
        match = TOKEN.fullmatch(piece)
        if piece != "per" and not (match and match[1] in SYMBOLS):
            break
        run.insert(0, piece)
    sign, factors = "", []
    for piece in run:
        if piece == "per":
            sign = "-"
            continue
        symbol, power = TOKEN.fullmatch(piece).groups()  # type: ignore[union-attr]
        factors.append({"deg": "degree"}.get(symbol, symbol) + (sign + (power or "1")))
    return " ".join(factors)


@pytest.mark.parametrize("key", ALL_KEYS, ids=lambda key: key.key)
def test_the_unit_of_a_key_is_the_one_its_name_ends_in(key: KeyReference) -> None:
    name = key.key.replace(": ", ".").split(".")[-1]
    if name == "phase_deg_of_basin":  # the one key whose unit is not at the end
        assert key.unit == "degree"
        return
    in_name = unit_in_name(name)
    if key.unit == FIELD_UNIT:
        assert in_name in ("", "degree-1")
    elif in_name:
        assert cf_units.Unit(key.unit) == cf_units.Unit(in_name)
    else:
        assert key.unit in ("", "1"), "a quantity with a unit must name it"


@pytest.mark.parametrize("key", ALL_KEYS, ids=lambda key: key.key)
def test_a_key_is_one_sentence(key: KeyReference) -> None:
    assert re.fullmatch(r"(The|A|What|Whether|How) [^;.]*(\d\.\d+[^;.]*)?\.", key.sentence)


ABSENT_BY_DEFAULT = {"entrainment.diffusive", "entrainment.prescribed", "surface.fresh_water"}
WITH_REQUIRED_KEYS = {"surface.heat.loss_band", "motion.sponge"}
STATED = [
    key
    for key in KEYS
    if key.default not in ("required", "the defaults of its keys")
    and "(" not in key.key
    and "[]" not in key.key
    and key.key.rpartition(".")[0] not in WITH_REQUIRED_KEYS
]


@pytest.mark.parametrize("key", STATED, ids=lambda key: key.key)
def test_the_default_that_is_stated_is_the_one_that_applies(key: KeyReference) -> None:
    parent = key.key.rpartition(".")[0]
    base = config.loads("name: a")
    defaults = base.with_changes({parent: {}}) if parent in ABSENT_BY_DEFAULT else base
    assert config.loads("name: a\n" + yaml_with(key.key, key.default)) == defaults


def yaml_with(key: str, value: str) -> str:
    """A YAML text that gives one dotted key a value."""
    *parents, last = key.split(".")
    above = "".join(f"{'  ' * depth}{part}:\n" for depth, part in enumerate(parents))
    return above + f"{'  ' * len(parents)}{last}: {value}\n"


def test_the_text_has_every_key_and_every_kind_of_field() -> None:
    blocks = reference_text().split("\n\n")
    for key in ALL_KEYS:
        (block,) = [block for block in blocks if block.split("\n")[0].split(" [")[0] == key.key]
        assert key.sentence in block and key.default in block and key.allowed in block
    for kind in FIELD_KINDS:
        assert (kind.__doc__ or "") in reference_text()


def test_the_range_that_is_stated_is_the_range_that_is_checked() -> None:
    stated = {key.key: key.allowed for key in KEYS}
    assert stated["numerics.step_safety"] == "a number > 0 and <= 1"
    assert stated["motion.linear_about_depth_m"] == "a number > 0 m or null"
    assert stated["surface.heat.prescribed_W_per_m2"] == (
        "a number or a field (shape, points, file or sum), W m-2 or null"
    )
    for value, fits in ((0.0, False), (1.0, True), (1.0000001, False)):
        text = f"name: a\nnumerics: {{step_safety: {value}}}"
        if fits:
            assert config.loads(text).numerics.step_safety == value
        else:
            with pytest.raises(ConfigError, match="> 0 and <= 1"):
                config.loads(text)


def test_the_exported_schema_is_json_with_units_and_sentences() -> None:
    schema = json.loads(json.dumps(json_schema()))
    width = schema["$defs"]["Basin"]["properties"]["width_km"]
    assert width["unit"] == "km" and width["exclusiveMinimum"] == 0.0 and width["type"] == "number"
    assert width["description"] == "The distance from the western to the eastern wall."
    assert schema["additionalProperties"] is False and schema["required"] == ["name"]
