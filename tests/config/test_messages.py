"""Every fault says where it is, what was got, what is allowed and what to do: the exact lines users see."""

import pytest

from oceanbox import config
from oceanbox.errors import ConfigError

WIND = "name: a\nsurface:\n  wind:\n    zonal_stress_N_per_m2: "
HEAT = "name: a\nsurface:\n  heat:\n    "
TEMPERATURE = "name: a\nlayers:\n  - initial_temperature_degC:\n      "
A_FIELD = "a number or a field (shape, points, file or sum)"
SHAPES = "gaussian | tropics_to_pole | cosine | band | linear"
PAIRS = "a list of 2: a number >= -90 and <= 90, a number"
SYNTAX = (
    "the file must be one YAML document; "
    "mend this line or the one before it: indentation by spaces, brackets, quotes, a missing ': '"
)

CASES: dict[str, tuple[str, list[str]]] = {
    # keys
    "a misspelt section": (
        "name: a\nbasn: {}\n",
        ["text:2: basn: got {}; no such key at the top level; did you mean 'basin'?"],
    ),
    "a misspelt key": (
        "name: a\nbasin:\n  widht_km: 3\n",
        ["text:3: basin.widht_km: got 3; no such key in basin; did you mean 'width_km'?"],
    ),
    "a key like no other": (
        "name: a\nmixing:\n  nonsense: 3\n",
        ["text:3: mixing.nonsense: got 3; no such key in mixing; the keys here are lateral_diffusivity_m2_per_s"],
    ),
    "a missing key": (
        "basin:\n  cells_x: 50\n",
        [
            "text:1: name: got nothing; required: text that matches ^[a-z0-9_-]+$; "
            "add name: the name of the experiment and of its results, of a-z, 0-9, '_' and '-'"
        ],
    ),
    "a key written twice": (
        "name: a\nbasin:\n  width_km: 1\n  width_km: 2\n",
        ["text:4: basin.width_km: got the key a second time; each key once (first at text:3); remove one of the two"],
    ),
    "a key that is a number": (
        "name: a\n3: b\n",
        ["text:2: got the key '3'; keys must be text; rename or quote this key"],
    ),
    "a key that is a list": (
        "name: a\n[1, 2]: b\n",
        ["text:2: got a list or mapping as key; keys must be text; rename or quote this key"],
    ),
    # scalars
    "a number out of range": (
        "name: a\nbasin:\n  width_km: -6000\n",
        [
            "text:3: basin.width_km: got -6000; must be a number > 0 km; "
            "give the distance from the western to the eastern wall"
        ],
    ),
    "a number outside two bounds": (
        "name: a\nnumerics:\n  step_safety: 1.5\n",
        [
            "text:3: numerics.step_safety: got 1.5; must be a number > 0 and <= 1; "
            "give the share of the stability limit that is used"
        ],
    ),
    "a number with its unit": (
        "name: a\nbasin:\n  width_km: 6000 km\n",
        [
            "text:3: basin.width_km: got '6000 km'; must be a number > 0 km; "
            "write the bare number, 6000, the unit is part of the key"
        ],
    ),
    "a number in quotes": (
        "name: a\nnumerics:\n  step_safety: '0.5'\n",
        ["text:3: numerics.step_safety: got '0.5'; must be a number > 0 and <= 1; write the bare number, 0.5"],
    ),
    "yes or no for a number": (
        "name: a\nbasin:\n  width_km: true\n",
        [
            "text:3: basin.width_km: got true; must be a number > 0 km; "
            "give the distance from the western to the eastern wall"
        ],
    ),
    "a fraction of a cell": (
        "name: a\nbasin:\n  cells_x: 60.5\n",
        ["text:3: basin.cells_x: got 60.5; must be a whole number >= 4; give the number of cells from west to east"],
    ),
    "a whole number in quotes, and yes for one": (
        "name: a\nequilibrium:\n  windows_in_a_row: true\nbasin:\n  cells_x: '60'\n",
        [
            "text:3: equilibrium.windows_in_a_row: got true; must be a whole number >= 1; "
            "give the number of windows in a row for which all this must hold",
            "text:5: basin.cells_x: got '60'; must be a whole number >= 4; write the bare number, 60",
        ],
    ),
    "infinity": (
        "name: a\nbasin:\n  north_km: .inf\n",
        [
            "text:3: basin.north_km: got inf; must be a finite number in km; "
            "give the y of the northern wall, measured from the origin"
        ],
    ),
    "a word for yes or no": (
        "name: a\nmotion:\n  momentum_advection: on\n",
        ["text:3: motion.momentum_advection: got 'on'; must be true or false; write true or false"],
    ),
    "a misspelt choice": (
        "name: a\nbasin:\n  side_walls: freeslip\n",
        ["text:3: basin.side_walls: got 'freeslip'; must be one of free_slip | no_slip; did you mean 'free_slip'?"],
    ),
    "an unknown choice": (
        "name: a\nbasin:\n  side_walls: rough\n",
        ["text:3: basin.side_walls: got 'rough'; must be one of free_slip | no_slip; choose one of these"],
    ),
    "a name with a space": (
        "name: My run\n",
        [
            "text:1: name: got 'My run'; must be text that matches ^[a-z0-9_-]+$; "
            "give the name of the experiment and of its results, of a-z, 0-9, '_' and '-'"
        ],
    ),
    "a name that reads as a number": (
        "name: 2024\n",
        ["text:1: name: got 2024; must be text that matches ^[a-z0-9_-]+$; put it in quotes to make it text"],
    ),
    # sections
    "null for a section that must be there": (
        "name: a\nbasin:\n",
        ["text:2: basin: got null; must be a mapping of keys; remove the line to keep the defaults, or give the keys"],
    ),
    "a number for a section": (
        "name: a\nmixing: 3\n",
        [
            "text:2: mixing: got 3; must be a mapping of keys; "
            "give its keys on lines below: lateral_diffusivity_m2_per_s"
        ],
    ),
    "two layers": (
        "name: a\nlayers: [{}, {}]\n",
        [
            "text:2: layers: got [{}, {}]; must be a list, exactly 1 item, each a mapping of keys; "
            "give the moving layers from the top down, exactly one for now"
        ],
    ),
    # fields
    "a misspelt shape": (
        WIND + "{shape: gausian, peak: 1}\n",
        [
            "text:4: surface.wind.zonal_stress_N_per_m2.shape: got 'gausian'; "
            f"must be one of {SHAPES}; did you mean 'gaussian'?"
        ],
    ),
    "a field without its kind": (
        WIND + "{peak: 1}\n",
        [
            f"text:4: surface.wind.zonal_stress_N_per_m2: got {{peak: 1}}; must be {A_FIELD}, N m-2; "
            f"say which with shape: {SHAPES}"
        ],
    ),
    "a field without a needed key": (
        WIND + "{shape: gaussian, peak: 1}\n",
        [
            "text:4: surface.wind.zonal_stress_N_per_m2.width_deg: got nothing; required: a number > 0 degree; "
            "add width_deg: the distance from the peak at which the bell falls to 1/e"
        ],
    ),
    "a key of another kind of field": (
        WIND + "{points: [[0, 1], [1, 2]], peak: 1}\n",
        [
            "text:4: surface.wind.zonal_stress_N_per_m2.peak: got 1; "
            "no such key in surface.wind.zonal_stress_N_per_m2; the keys here are points"
        ],
    ),
    "text for a field": (
        WIND + "strong\n",
        [
            f"text:4: surface.wind.zonal_stress_N_per_m2: got 'strong'; must be {A_FIELD}, N m-2; "
            "give the eastward wind stress"
        ],
    ),
    "points that turn back": (
        TEMPERATURE + "points:\n        - [0, 26]\n        - [-10, 20]\n",
        [
            "text:6: layers.0.initial_temperature_degC.points.1: got latitude -10 after 0; "
            "latitudes must increase strictly; sort the points from south to north and keep one for each latitude"
        ],
    ),
    "a point beyond the pole": (
        TEMPERATURE + "points:\n        - [0, 26]\n        - [95, 20]\n",
        [
            "text:6: layers.0.initial_temperature_degC.points.1.0: got 95; must be a number >= -90 and <= 90; "
            "give the [latitude, value] pairs, latitudes strictly increasing, at least two"
        ],
    ),
    "one point": (
        TEMPERATURE + "points: [[0, 26]]\n",
        [
            "text:4: layers.0.initial_temperature_degC.points: got [[0, 26]]; "
            f"must be a list, 2 or more items, each {PAIRS}; "
            "give the [latitude, value] pairs, latitudes strictly increasing, at least two"
        ],
    ),
    "a point of three numbers and one of one": (
        TEMPERATURE + "points: [[0, 26], [1, 2, 3], [4]]\n",
        [
            f"text:4: layers.0.initial_temperature_degC.points.{index}: got {got}; must be {PAIRS}; "
            "give the [latitude, value] pairs, latitudes strictly increasing, at least two"
            for index, got in ((1, "[1, 2, 3]"), (2, "[4]"))
        ],
    ),
    "faults inside a sum": (
        TEMPERATURE + "sum:\n        - {shape: band, peak: 1, from_deg: 40, to_deg: 30}\n        - warm\n",
        [
            "text:5: layers.0.initial_temperature_degC.sum.0.to_deg: got 30 with from_deg 40; "
            "must be more than from_deg; raise to_deg or lower from_deg (both are distances from the equator)",
            f"text:6: layers.0.initial_temperature_degC.sum.1: got 'warm'; must be {A_FIELD}; "
            "give the fields to add up, at least one",
        ],
    ),
    "a tropical plateau beyond the polar latitude": (
        TEMPERATURE + "{shape: tropics_to_pole, tropical: 1, polar: 2, flat_to_deg: 50, pole_deg: 45}\n",
        [
            "text:4: layers.0.initial_temperature_degC.pole_deg: got 45 with flat_to_deg 50; "
            "must be more than flat_to_deg; raise pole_deg or lower flat_to_deg"
        ],
    ),
    "a NetCDF file that is not there": (
        TEMPERATURE + "{file: nowhere.nc, variable: t}\n",
        [
            "text:4: layers.0.initial_temperature_degC.file: got nowhere.nc; there is no such file; "
            "mend the path, which starts at the folder of the YAML file"
        ],
    ),
    "an unknown efficiency": (
        "name: a\ntransformation:\n  efficiency: {kind: cool}\n",
        [
            "text:3: transformation.efficiency.kind: got 'cool'; must be one of constant | cooling; "
            "did you mean 'cooling'?"
        ],
    ),
    "an efficiency that is a number": (
        "name: a\ntransformation:\n  efficiency: 0.5\n",
        [
            "text:3: transformation.efficiency: got 0.5; must be a mapping with kind constant | cooling; "
            "say which with kind: constant | cooling"
        ],
    ),
    # rules between keys
    "walls that have changed places": (
        "name: a\nbasin:\n  south_km: 0\n  north_km: -10\n",
        [
            "text:4: basin.north_km: got -10 with south_km 0; must be more than south_km; "
            "raise north_km or lower south_km"
        ],
    ),
    "a loss band with peak and total": (
        HEAT + "loss_band: {peak_W_per_m2: 100, total_PW: 1}\n",
        [
            "text:4: surface.heat.loss_band.total_PW: got 1 beside peak_W_per_m2 100; "
            "exactly one of them says how strong the loss is; "
            "remove one of the two, or set it to null where a file it extends has it"
        ],
    ),
    "a loss band with neither, and edges swapped": (
        HEAT + "loss_band: {from_deg: 50, to_deg: 40}\n",
        [
            "text:4: surface.heat.loss_band.to_deg: got 40 with from_deg 50; must be more than from_deg; "
            "raise to_deg or lower from_deg (both are distances from the equator)",
            "text:4: surface.heat.loss_band.peak_W_per_m2: got neither peak_W_per_m2 nor total_PW; "
            "exactly one of them says how strong the loss is; give one of the two",
        ],
    ),
    "a negative loss": (
        HEAT + "loss_band: {peak_W_per_m2: -100}\n",
        [
            "text:4: surface.heat.loss_band.peak_W_per_m2: got -100; must be a number >= 0 W m-2 or null; "
            "give the loss in the middle of the band, a positive number, null when total_PW is given"
        ],
    ),
    "a negative restoring": (
        HEAT + "restoring: {coefficient_W_per_m2_K: -5}\n",
        [
            "text:4: surface.heat.restoring.coefficient_W_per_m2_K: got -5.0; must be >= 0 W m-2 K-1; "
            "give a damping rate of 25 to 50, or set restoring to null"
        ],
    ),
    "a balance band from north to south": (
        "name: a\nsurface:\n  fresh_water: {balance_band_deg: [30, 10]}\n",
        [
            "text:3: surface.fresh_water.balance_band_deg: got [30, 10]; the second must be more than the first; "
            "write the equatorward edge first (both are distances from the equator)"
        ],
    ),
    "linear dynamics with advection": (
        "name: a\nmotion:\n  linear_about_depth_m: 100\n",
        [
            "text:2: motion.momentum_advection: got true with linear_about_depth_m 100; "
            "linear dynamics have no advection of momentum; "
            "set momentum_advection to false, or linear_about_depth_m to null"
        ],
    ),
    "a sponge on an unknown side": (
        "name: a\nmotion:\n  sponge: {sides: [west, wst]}\n",
        ["text:3: motion.sponge.sides.1: got 'wst'; must be one of west | east | south | north; did you mean 'west'?"],
    ),
    "a sponge twice on one side": (
        "name: a\nmotion:\n  sponge: {sides: [north, north]}\n",
        ["text:3: motion.sponge.sides: got [north, north]; each wall at most once; remove the repeated wall"],
    ),
    "a sponge on no side": (
        "name: a\nmotion:\n  sponge: {sides: []}\n",
        [
            "text:3: motion.sponge.sides: got []; "
            "must be a list, 1 or more items, each one of west | east | south | north; "
            "give the walls that carry a sponge"
        ],
    ),
    "a sponge where there is no wall": (
        "name: a\nbasin:\n  zonal_boundary: periodic\nmotion:\n  sponge: {sides: [west, north]}\n",
        [
            "text:5: motion.sponge.sides: got west with basin.zonal_boundary periodic; a sponge needs a wall; "
            "keep south and north only, or set basin.zonal_boundary to walls"
        ],
    ),
    "a start deeper than the deepest layer": (
        "name: a\nlayers: [{initial_thickness_m: 700}]\nnumerics: {deepest_layer_m: 600}\n",
        [
            "text:2: layers.0.initial_thickness_m: got 700 with numerics.deepest_layer_m 600; "
            "must be at most numerics.deepest_layer_m, which sets the time step; "
            "raise numerics.deepest_layer_m or lower this depth"
        ],
    ),
    "no water, and less than no salt": (
        "name: a\nlayers: [{initial_thickness_m: 0, initial_salinity_g_per_kg: -1}]\n",
        [
            "text:2: layers.0.initial_thickness_m: got 0.0; must be > 0 m; "
            "give the thickness of the warm layer at the start",
            "text:2: layers.0.initial_salinity_g_per_kg: got -1.0; must be >= 0 g kg-1; "
            "give the salinity of the warm layer at the start",
        ],
    ),
    "a search shorter than its windows": (
        "name: a\nequilibrium: {window_years: 150, windows_in_a_row: 2, longest_years: 200}\n",
        [
            "text:2: equilibrium.longest_years: got 200; must hold 2 windows of 150 years: >= 300; "
            "raise longest_years, or lower window_years or windows_in_a_row"
        ],
    ),
    "a snapshot after the end": (
        "name: a\nevolve:\n  duration_days: 10\n  snapshot_interval_days: 20\n",
        [
            "text:4: evolve.snapshot_interval_days: got 20; must be at most duration_days, 10; "
            "shorten the interval, lengthen the run, or write null for no snapshots"
        ],
    ),
    "samples rarer than the series": (
        "name: a\noutput:\n  sample_interval_days: 60\n  series_interval_days: 30\n",
        [
            "text:3: output.sample_interval_days: got 60; must be at most series_interval_days, 30; "
            "sample more often or lengthen series_interval_days"
        ],
    ),
    "water that sinks when warmed": (
        "name: a\nwater:\n  thermal_expansion_at_0degC_per_K: -1.0e-4\n"
        "  thermal_expansion_slope_per_K2: 1.0e-5\n  abyss_temperature_degC: 5\n",
        [
            "text:3: water.thermal_expansion_at_0degC_per_K: "
            "got -0.0001, hence -5e-05 K-1 at the abyss's 5 degC; "
            "thermal expansion must be > 0 at the temperature of the abyss; raise this value or abyss_temperature_degC"
        ],
    ),
    # the file as YAML
    "a tab": (
        "name: a\nbasin:\n\twidth_km: 1\n",
        [f"text:3: got a syntax error: found character '\\t' that cannot start any token (column 1); {SYNTAX}"],
    ),
    "two documents": (
        "name: a\n---\nname: b\n",
        [f"text:2: got a syntax error: found another document (column 1); {SYNTAX}"],
    ),
    "a list": ("- a\n", ["text:1: got no mapping; a configuration is a mapping; write 'key: value' lines"]),
    "brackets without end": (
        "name: " + "[" * 3000,
        ["text:1: got nesting without end; a configuration is a few levels deep; flatten it"],
    ),
    "a tag": (
        "name: !!python/name:os.system a\n",
        [
            "text:1: name: got 'a' with the tag tag:yaml.org,2002:python/name:os.system; "
            "plain values only; remove the tag"
        ],
    ),
    "a value that contains itself": (
        "name: a\nlayers: &a [*a]\n",
        [
            "text:2: layers.0: got an alias of itself; values must be finite; write the value out",
            "text:2: layers.0: got null; must be a mapping of keys; "
            "remove the line to keep the defaults, or give the keys",
        ],
    ),
    "a text that extends a file": (
        "name: a\nextends: other.yaml\n",
        ["text:2: extends: got 'other.yaml'; this text has no folder for paths to start at; load it from a file"],
    ),
    "a number for the file to extend": (
        "name: a\nextends: 3\n",
        ["text:2: extends: got 3; must be the path of a YAML file; write a path that starts at this file's folder"],
    ),
}


@pytest.mark.parametrize(("text", "lines"), CASES.values(), ids=CASES.keys())
def test_a_wrong_configuration_is_told_in_exactly_these_lines(text: str, lines: list[str]) -> None:
    with pytest.raises(ConfigError) as caught:
        config.loads(text)
    assert str(caught.value).splitlines() == lines


def test_faults_of_all_sections_come_together_in_the_order_of_the_lines() -> None:
    text = (
        "name: a\nnumerics: {scheme: leap}\nbasin:\n  cells_y: 3\n  cells_x: 3\n  cells_x: 9\nmixing: {x: 1}\n"
        "evolve: {duration_days: 1, snapshot_interval_days: 2}\n"
    )
    with pytest.raises(ConfigError) as caught:
        config.loads(text)
    assert [(fault.location, fault.key) for fault in caught.value.faults] == [
        ("text:2", "numerics.scheme"),
        ("text:4", "basin.cells_y"),
        ("text:5", "basin.cells_x"),
        ("text:6", "basin.cells_x"),
        ("text:7", "mixing.x"),
        ("text:8", "evolve.snapshot_interval_days"),
    ]
