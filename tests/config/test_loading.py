"""Files, the files they extend, and where each value stands."""

from pathlib import Path

import pytest

from oceanbox import config
from oceanbox.config.fields import FileField, Gaussian, Linear, Points, SumOfFields
from oceanbox.errors import ConfigError


def write(folder: Path, **texts: str) -> None:
    for name, text in texts.items():
        (folder / f"{name}.yaml").write_text(text, encoding="utf-8")


def refused(path: Path) -> list[str]:
    with pytest.raises(ConfigError) as caught:
        config.load(path)
    return str(caught.value).splitlines()


def test_a_name_alone_is_a_complete_configuration() -> None:
    assert config.loads("name: a") == config.Config(name="a")


def test_mappings_merge_and_everything_else_is_replaced(tmp_path: Path) -> None:
    write(
        tmp_path,
        base="name: base\nbasin: {width_km: 100, cells_x: 7}\nmotion: {sponge: {sides: [west, east], width_km: 9}}\n"
        "outcrop: {margin_K: 0.1}\n",
        top="extends: base.yaml\nname: top\nbasin: {cells_x: 8}\nmotion: {sponge: {sides: [south]}}\noutcrop: null\n",
    )
    loaded = config.load(tmp_path / "top.yaml").config
    assert (loaded.name, loaded.basin.width_km, loaded.basin.cells_x) == ("top", 100.0, 8)
    assert loaded.motion.sponge is not None
    assert (loaded.motion.sponge.sides, loaded.motion.sponge.width_km) == (("south",), 9.0)
    assert loaded.outcrop is None


def test_a_field_of_another_kind_replaces_the_old_one_as_a_whole(tmp_path: Path) -> None:
    wind = "surface: {wind: {zonal_stress_N_per_m2: %s}}\n"
    write(
        tmp_path,
        base="name: base\n" + wind % "{shape: gaussian, peak: -0.06, width_deg: 18}",
        same="extends: base.yaml\n" + wind % "{peak: -0.09}",
        other="extends: base.yaml\n" + wind % "{shape: linear, value_at_origin: 1}",
        points="extends: base.yaml\n" + wind % "{points: [[0, 1], [1, 2]]}",
        number="extends: base.yaml\n" + wind % "0.1",
    )

    def stress(name: str) -> object:
        return config.load(tmp_path / f"{name}.yaml").config.surface.wind.zonal_stress_N_per_m2

    assert stress("same") == Gaussian(peak=-0.09, width_deg=18.0)
    assert stress("other") == Linear(value_at_origin=1.0)
    assert stress("points") == Points(points=((0.0, 1.0), (1.0, 2.0)))
    assert stress("number") == 0.1


def test_a_value_is_located_in_the_file_that_wrote_it_last(tmp_path: Path) -> None:
    (tmp_path / "deep").mkdir()
    write(tmp_path / "deep", base="name: base\nbasin:\n  width_km: 100\n  cells_x: 7\nlayers:\n  - {}\n")
    write(
        tmp_path,
        middle="# nothing\nextends: deep/base.yaml\nbasin:\n  cells_x: 8\n",
        top="extends: middle.yaml\nname: top\n",
    )
    source = config.load(tmp_path / "top.yaml").source
    top, middle, base = tmp_path / "top.yaml", tmp_path / "middle.yaml", tmp_path / "deep" / "base.yaml"
    assert source.locate("name") == f"{top}:2"
    assert source.locate("basin.cells_x") == f"{middle}:4"
    assert source.locate("basin.width_km") == f"{base}:3"
    assert source.locate("layers.0") == f"{base}:6"
    assert source.locate("basin.beta_per_m_s") == f"{middle}:3", "a default is located at the section it belongs to"
    assert source.locate("water.gravity_m_per_s2") == f"{top}:1"


def test_a_fault_in_an_extended_file_is_located_there(tmp_path: Path) -> None:
    write(
        tmp_path,
        base="name: base\nbasin:\n  south_km: 10\n  width: 3\n",
        top="extends: base.yaml\nbasin:\n  cells_x: 2\nmixing:\n  lateral: 1\n",
    )
    lines = refused(tmp_path / "top.yaml")
    assert [line.split(": got")[0] for line in lines] == [
        f"{tmp_path / 'base.yaml'}:4: basin.width",
        f"{tmp_path / 'top.yaml'}:3: basin.cells_x",
        f"{tmp_path / 'top.yaml'}:5: mixing.lateral",
    ]


def test_files_that_extend_each_other_are_refused_with_the_circle(tmp_path: Path) -> None:
    write(
        tmp_path,
        a="name: a\nextends: b.yaml\n",
        b="extends: c.yaml\n",
        c="extends: ./a.yaml\n",
        d="name: d\nextends: d.yaml\n",
    )
    assert refused(tmp_path / "a.yaml") == [
        f"{tmp_path / 'c.yaml'}:1: extends: got './a.yaml'; files may not extend each other in a circle: "
        "a.yaml -> b.yaml -> c.yaml -> a.yaml; break the circle"
    ]
    assert refused(tmp_path / "d.yaml") == [
        f"{tmp_path / 'd.yaml'}:2: extends: got 'd.yaml'; files may not extend each other in a circle: "
        "d.yaml -> d.yaml; break the circle"
    ]


def test_a_missing_file_is_refused_with_the_nearest_name(tmp_path: Path) -> None:
    write(tmp_path, reference="name: r\n", top="name: top\nextends: refrence.yaml\nbasin: {cells_x: 2}\n")
    assert refused(tmp_path / "tap.yaml") == [
        f"got {tmp_path / 'tap.yaml'}; there is no file tap.yaml in {tmp_path}; did you mean 'top.yaml'?"
    ]
    assert refused(tmp_path / "top.yaml") == [
        f"{tmp_path / 'top.yaml'}:2: extends: got 'refrence.yaml'; there is no file refrence.yaml in {tmp_path}; "
        "did you mean 'reference.yaml'?",
        f"{tmp_path / 'top.yaml'}:3: basin.cells_x: got 2; must be a whole number >= 4; "
        "give the number of cells from west to east",
    ]


def test_what_is_no_readable_text_is_refused(tmp_path: Path) -> None:
    (tmp_path / "binary.yaml").write_bytes(b"name: \xff\xfe\n")
    remedy = "give the path of a readable YAML file"
    assert refused(tmp_path / "binary.yaml") == [
        f"got {tmp_path / 'binary.yaml'}; binary.yaml is not UTF-8 text; {remedy}"
    ]
    assert refused(tmp_path) == [f"got {tmp_path}; {tmp_path.name} cannot be read (Is a directory); {remedy}"]


def test_a_syntax_error_in_an_extended_file_is_located_there(tmp_path: Path) -> None:
    write(tmp_path, base="name: base\nbasin: [\n", top="name: top\nextends: base.yaml\n")
    (line,) = refused(tmp_path / "top.yaml")
    assert line.startswith(f"{tmp_path / 'base.yaml'}:3: got a syntax error: ")


def test_the_path_of_a_netcdf_file_starts_at_the_yaml_file_that_names_it(tmp_path: Path) -> None:
    (tmp_path / "data").mkdir()
    (tmp_path / "data" / "wind.nc").write_bytes(b"")
    write(
        tmp_path / "data",
        base="name: base\nsurface: {wind: {zonal_stress_N_per_m2: {sum: [1.0, {file: wind.nc, variable: taux}]}}}\n",
    )
    write(tmp_path, top="extends: data/base.yaml\n")
    stress = config.load(tmp_path / "top.yaml").config.surface.wind.zonal_stress_N_per_m2
    assert isinstance(stress, SumOfFields)
    assert stress.sum[1] == FileField(file=str((tmp_path / "data" / "wind.nc").resolve()), variable="taux")
