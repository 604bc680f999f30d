"""A configuration written out in full and read again is the same configuration."""

import math
from types import NoneType, UnionType
from typing import Annotated, Any, Literal, Union, get_args, get_origin

import annotated_types
import pytest
import yaml
from hypothesis import example, given, settings
from hypothesis import strategies as st
from pydantic import ValidationError
from pydantic.fields import FieldInfo

from oceanbox import config
from oceanbox.config.fields import FileField, Points
from oceanbox.config.section import Section
from oceanbox.config.surface import LossBand
from oceanbox.errors import ConfigError


def numbers(metadata: tuple[Any, ...]) -> st.SearchStrategy[float]:
    """Every float the bounds allow, however large or small."""
    low, high, low_open = None, None, False
    for item in metadata:
        if isinstance(item, annotated_types.Gt | annotated_types.Ge):
            low, low_open = float(getattr(item, "gt", getattr(item, "ge", 0.0))), isinstance(item, annotated_types.Gt)
        if isinstance(item, annotated_types.Le):
            high = float(item.le)  # type: ignore[arg-type]
    return st.floats(low, high, allow_nan=False, allow_infinity=False, exclude_min=low_open)


def values(annotation: Any, metadata: tuple[Any, ...] = ()) -> st.SearchStrategy[Any]:
    """Plain data for an annotation of the schema."""
    origin, arguments = get_origin(annotation), get_args(annotation)
    if origin is Annotated:
        inner = [
            piece for item in arguments[1:] for piece in (item.metadata if isinstance(item, FieldInfo) else [item])
        ]
        return values(arguments[0], (*metadata, *inner))
    if origin in (Union, UnionType):
        return st.one_of([values(argument, metadata) for argument in arguments])
    if origin is tuple and arguments[-1] is Ellipsis:
        sizes = {type(item): item for item in metadata}
        most = sizes.get(annotated_types.MaxLen)
        least = sizes[annotated_types.MinLen].min_length
        return st.lists(values(arguments[0]), min_size=least, max_size=most.max_length if most else least + 1)
    if origin is tuple:
        return st.tuples(*[values(argument) for argument in arguments]).map(list)
    if origin is Literal:
        return st.sampled_from(arguments)
    if isinstance(annotation, type) and issubclass(annotation, Section):
        return st.deferred(lambda: sections(annotation))
    if annotation is float:
        return numbers(metadata)
    simple = {NoneType: st.none(), bool: st.booleans(), int: st.integers(4, 9), str: st.text(min_size=1)}
    return simple[annotation]


def accepted(model: type[Section], data: dict[str, Any]) -> bool:
    try:
        model.model_validate(data)
    except ValidationError:
        return False
    return True


def sections(model: type[Section]) -> st.SearchStrategy[dict[str, Any]]:
    """Plain data for a section: some keys left out, the rules between keys obeyed."""
    if model is Points:
        latitudes = st.lists(st.floats(-90.0, 90.0), min_size=2, max_size=4, unique=True).map(sorted)
        return latitudes.map(lambda row: {"points": [[latitude, latitude**2] for latitude in row]})
    if model is FileField:  # a file that is there
        return st.builds(
            lambda name, index: {"file": __file__, "variable": name, "time_index": index},
            st.text(min_size=1),
            st.integers(0, 9),
        )
    if model is LossBand:
        edges = st.lists(st.floats(0.0, 90.0), min_size=2, max_size=2, unique=True).map(sorted)
        strength = st.sampled_from([{"peak_W_per_m2": 1.0e-7}, {"total_PW": 1.0e22}])
        return st.builds(lambda edge, kind: {"from_deg": edge[0], "to_deg": edge[1], **kind}, edges, strength)
    always = {"name", "shape", "kind"}
    required = {
        n: values(i.annotation, tuple(i.metadata))
        for n, i in model.model_fields.items()
        if i.is_required() or n in always
    }
    optional = {n: values(i.annotation, tuple(i.metadata)) for n, i in model.model_fields.items() if n not in required}
    if "name" in required:
        required["name"] = st.from_regex(r"[a-z0-9_-]+", fullmatch=True)
    return st.fixed_dictionaries(required, optional=optional).filter(lambda data: accepted(model, data))


@settings(max_examples=150, deadline=None)
@example({"name": "1e3", "description": "null"})
@example({"name": "0x1f", "description": "on"})
@given(sections(config.Config))
def test_a_configuration_survives_being_written_and_read(data: dict[str, Any]) -> None:
    written = config.Config.model_validate(data)
    read = config.loads(config.resolved_yaml(written))
    assert read == written
    assert config.identity(read) == config.identity(written)


def test_the_resolved_configuration_has_every_key() -> None:
    text = config.resolved_yaml(config.loads("name: a"))
    tree = yaml.safe_load(text)
    for section, model in tree.items():
        if isinstance(model, dict):
            assert set(model) == set(type(getattr(config.loads(text), section)).model_fields)
    assert set(tree) == set(config.Config.model_fields)


def test_equal_configurations_have_one_identity_and_different_ones_do_not() -> None:
    one = config.loads("name: a")
    assert config.identity(one) == config.identity(
        config.loads("name: b\ndescription: other words\nbasin: {width_km: 6e3}")
    )
    zero = one.with_changes({"basin.coriolis_at_origin_per_s": -0.0})
    assert zero == one and math.copysign(1.0, zero.basin.coriolis_at_origin_per_s) == -1.0
    assert config.identity(zero) == config.identity(one), "equal numbers, equal identity, whatever the sign of zero"
    width = one.basin.width_km
    next_width = one.with_changes({"basin.width_km": math.nextafter(width, math.inf)})
    assert config.identity(next_width) != config.identity(one), "the last bit of a number counts"
    assert config.identity(one.with_changes({"outcrop": None})) != config.identity(one)


def test_the_identity_follows_the_contents_of_a_file_and_not_its_place(tmp_path: Any) -> None:
    def identity_of(name: str, content: bytes) -> str:
        (tmp_path / name).write_bytes(content)
        changes = {"surface.wind.zonal_stress_N_per_m2": {"file": str(tmp_path / name), "variable": "taux"}}
        return config.identity(config.loads("name: a").with_changes(changes))

    assert identity_of("a.nc", b"1") == identity_of("b.nc", b"1")
    assert identity_of("a.nc", b"1") != identity_of("a.nc", b"2")
    (tmp_path / "a.nc").unlink()
    with pytest.raises(ConfigError, match="put the file back"):
        changes = {"surface.wind.zonal_stress_N_per_m2": {"file": str(tmp_path / "a.nc"), "variable": "taux"}}
        config.identity(config.loads("name: a").with_changes(changes))
