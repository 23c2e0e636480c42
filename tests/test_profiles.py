"""Profile files that are sound: every key is taken, and means what the interface says."""

from __future__ import annotations

import hashlib
import math
import subprocess
import sys
from pathlib import Path

import pytest

from tankcalc.errors import ProfileError
from tankcalc.fluids.expansion import Expansion
from tankcalc.fluids.samples import Samples
from tankcalc.fluids.table import Table
from tankcalc.instruments import DryLeg, FilledLeg, Purge
from tankcalc.profiles import Site, load_site
from tankcalc.tank import Tank

EVERYTHING = """\
name = "T-101"
service = "gas oil storage"
contents = "oil"

[shape]
kind = "vertical cylinder"
courses = [{ height = "5 m", diameter = "20 m" }, { height = "10 m", diameter = "20.02 m" }]
bottom = { kind = "cone", depth = "0.3 m", points = "up" }
roof = { kind = "flat" }
datum = "0.5 m"

[shell]
material = "carbon steel"
calibrated_at = "15 degC"
insulated = true
thickness = ["12 mm", "10 mm"]
modulus = "206 GPa"
table_density = "850 kg/m3"

[transmitters.p1]
elevation = "0.5 m"
vent_elevation = "1 m"
reads = "gauge"
range = ["0 kPa(g)", "160 kPa"]
accuracy = { of_span = "0.05 %", of_limit = 0.001, of_reading = 0.0, per_kelvin = "2 Pa/K" }

[transmitters.p1.leg]
sensor_elevation = "-1 m"
fill_density = "960 kg/m3"
fill_density_at = "25 degC"
fill_expansion = "1.08e-3 / K"

[transmitters.p1.source]
from = "plc1"
register = 40
table = "input"
type = "float32"
words = "little"
bytes = "big"
is = "kPa"
scale = [0, 27648]
stale_after = "10 s"

[transmitters.p2]
elevation = "3 m"
reads = "absolute"
accuracy = { of_reading = "0.01 %", drift = "20 Pa", coverage = 2 }

[transmitters.p2.purge]
sensor_elevation = "16 m"
molar_mass = "28.96 g/mol"
friction = "35 Pa"

[transmitters.p3]
elevation = "14.4 m"
reads = "gauge"

[transmitters.p3.leg]
sensor_elevation = "1 m"
molar_mass = "28.01 g/mol"

[transmitters.p3.source]
from = "plc2"
node = "nsu=urn:plant;s=P3"

[transmitters.dp]
sensor_elevation = "0 m"
range = ["-100 kPa", "0 kPa"]
accuracy = "50 Pa"
high = { elevation = "1 m" }

[transmitters.dp.low]
elevation = "11 m"
fill_density = "960 kg/m3"
fill_density_at = "25 degC"
fill_expansion = "1.08e-3 / K"

[transmitters.dp.source]
from = "plc1"
register = 42

[limits]
critical_high = "14.0 m"
overfill_action = "13.8 m"
high_high = "13.5 m"
maximum_working = "13.0 m"
minimum_working = "0.9 m"
low_low = "0.7 m"

[[deadwood]]
bottom = "1 m"
top = "2 m"
volume = "0.5 m3"

[[deadwood]]
bottom = "3 m"
top = "4 m"
volume = "-0.1 m3"

[floating_roof]
mass = "40 t"
lands_at = "1.6 m"
floats_at = "1.8 m"
included_at = "845 kg/m3"

[table]
certificate = "12-345"
date = 2026-03-01
expires = "2036-03-01"
uncertainty = "0.1 %"

[level_gauge]
accuracy = "3 mm"
source = { from = "plc1", register = 44, is = "mm" }

[thermometer]
accuracy = "0.5 K"
elevations = ["1 m", "4 m"]
source = { from = "plc1", register = 46, is = "degC" }

[flow]
largest_in = "600 m3/h"
largest_out = "450 m3/h"

[vapour]
molar_mass = "44.1 g/mol"
compressibility = 0.9
"""

SITE = """\
name = "Test Site"
place = "By the water"
time_zone = "Europe/Lisbon"
units = "us"

[gravity]
latitude = "52.0 deg"
height = "12 m"

[air]
pressure = "1013.25 hPa"
temperature = "15 degC"
humidity = 0.5

[shifts]
Day = "06:00"
Night = "18:00"

[log]
store = "postgresql://log.example/shift"

[sources.plc1]
kind = "modbus tcp"
address = "127.0.0.1:5020"
unit = 1
every = "1 s"

[sources.plc2]
kind = "opc ua"
address = "opc.tcp://127.0.0.1:4840"
"""

OIL = '[density]\nmodel = "constant"\nvalue = "845 kg/m3"\n'


def write(folder: Path, name: str, text: str) -> None:
    (folder / name).parent.mkdir(parents=True, exist_ok=True)
    (folder / name).write_text(text)


@pytest.fixture
def site(tmp_path: Path) -> Site:
    write(tmp_path, "site.toml", SITE)
    write(tmp_path, "fluids/oil.toml", OIL)
    write(tmp_path, "tanks/T-101.toml", EVERYTHING)
    return load_site(tmp_path)


def shaped(site: Site, shape: str, rest: str = "") -> Tank:
    """The tank of a shape table."""
    write(site.folder, "tanks/X.toml", f"[shape]\n{shape}\n{rest}")
    return site.tank("X")


def test_a_site_is_what_its_file_says(site: Site) -> None:
    assert (site.name, site.place, site.time_zone, site.units) == (
        "Test Site",
        "By the water",
        "Europe/Lisbon",
        "us",
    )
    assert dict(site.shifts) == {"Day": "06:00", "Night": "18:00"}
    assert site.log_store == "postgresql://log.example/shift"
    assert site.surroundings.gravity_from == "latitude"
    assert site.surroundings.air_from == "state"
    assert site.surroundings.outside_pressure_pa == 101_325.0
    assert site.version == hashlib.sha256(SITE.encode()).hexdigest()
    assert not site.is_demo


def test_a_site_that_states_nothing_has_plain_defaults(tmp_path: Path) -> None:
    write(tmp_path, "plain/site.toml", "")
    site = load_site(tmp_path / "plain")
    assert (site.name, site.time_zone, site.units) == ("plain", "UTC", "metric")
    assert dict(site.shifts) == {"Day": "00:00"}
    assert site.log_store is None
    assert site.surroundings.gravity_from == "standard"
    assert (site.tank_names(), site.fluid_names()) == ([], [])


def test_every_key_of_a_tank_is_taken(site: Site) -> None:
    tank = site.tank("T-101")
    assert (tank.name, tank.service, tank.contents, tank.file, tank.kind) == (
        "T-101",
        "gas oil storage",
        "oil",
        "T-101",
        "vertical cylinder",
    )
    assert (tank.vessel.z_min, tank.vessel.z_max) == pytest.approx((-0.5, 14.5))
    assert tank.surroundings is site.surroundings
    assert list(tank.limits_m) == [
        "low_low",
        "minimum_working",
        "maximum_working",
        "high_high",
        "overfill_action",
        "critical_high",
    ]
    assert tank.limits_m["high_high"] == 13.5
    assert tank.thermometer_elevations_m == (1.0, 4.0)
    assert tank.largest_in_m3_s == pytest.approx(600 / 3600)
    assert tank.largest_out_m3_s == pytest.approx(450 / 3600)
    assert tank.level_gauge is not None
    assert tank.level_gauge.fixed == pytest.approx(0.003)
    assert tank.thermometer is not None
    assert tank.thermometer.fixed == 0.5
    assert tank.vapour is not None
    assert (tank.vapour.molar_mass_kg_mol, tank.vapour.compressibility) == pytest.approx(
        (0.0441, 0.9)
    )


def test_shell_roof_and_papers_are_taken(site: Site) -> None:
    tank = site.tank("T-101")
    assert tank.shell is not None
    assert tank.shell.expansion_per_k == 1.12e-5
    assert tank.shell.calibrated_at_k == pytest.approx(288.15)
    assert tank.shell.insulated
    assert tank.shell.thickness_m == pytest.approx((0.012, 0.010))
    assert tank.shell.modulus_pa == pytest.approx(2.06e11)
    assert tank.shell.table_density_kg_m3 == 850.0
    assert tank.floating_roof is not None
    assert (tank.floating_roof.mass_kg, tank.floating_roof.included_at_kg_m3) == (40_000.0, 845.0)
    assert (tank.floating_roof.lands_at_m, tank.floating_roof.floats_at_m) == (1.6, 1.8)
    assert tank.table is not None
    assert (tank.table.certificate, tank.table.date, tank.table.expires) == (
        "12-345",
        "2026-03-01",
        "2036-03-01",
    )
    assert tank.table.uncertainty == pytest.approx(0.001)


def test_transmitters_and_their_legs_are_taken(site: Site) -> None:
    tank = site.tank("T-101")
    p1, p2, p3 = (tank.transmitters[tag] for tag in ("p1", "p2", "p3"))
    assert (p1.tag, p1.elevation_m, p1.reads, p1.vent_m) == ("p1", 0.5, "gauge", 1.0)
    assert p1.range_pa == (0.0, 160_000.0)
    assert p1.leg == FilledLeg(-1.0, 960.0, pytest.approx(298.15), pytest.approx(1.08e-3))
    assert p1.accuracy is not None
    assert (p1.accuracy.of_span, p1.accuracy.of_limit) == pytest.approx((0.0005, 0.001))
    assert (p1.accuracy.per_kelvin, p1.accuracy.coverage) == (2.0, 1.0)
    assert (p2.reads, p2.leg) == ("absolute", Purge(16.0, pytest.approx(0.02896), 35.0))
    assert p2.accuracy is not None
    assert (p2.accuracy.drift, p2.accuracy.coverage) == (20.0, 2.0)
    assert p3.leg == DryLeg(1.0, None, pytest.approx(0.02801))
    assert p3.accuracy is None


def test_the_two_sides_of_a_differential_transmitter_are_taken(site: Site) -> None:
    dp = site.tank("T-101").dp
    assert dp is not None
    assert (dp.sensor_elevation_m, dp.range_pa) == (0.0, (-100_000.0, 0.0))
    assert (dp.high.elevation_m, dp.high.fill_density_kg_m3) == (1.0, None)
    assert (dp.low.elevation_m, dp.low.fill_density_kg_m3) == (11.0, 960.0)


def test_deadwood_counts_from_the_datum_that_was_moved(site: Site) -> None:
    with_it = site.tank("T-101").vessel
    cut = EVERYTHING.index("[[deadwood]]"), EVERYTHING.index("[floating_roof]")
    write(site.folder, "tanks/bare.toml", EVERYTHING[: cut[0]] + EVERYTHING[cut[1] :])
    bare = site.tank("bare").vessel
    for level, taken in ((1.0, 0.0), (1.5, 0.25), (3.0, 0.5), (4.0, 0.4), (14.5, 0.4)):
        assert bare.volume(level) - with_it.volume(level) == pytest.approx(taken, abs=1e-9)


def test_an_end_left_out_is_flat(site: Site) -> None:
    tank = shaped(site, 'kind = "vertical cylinder"\ndiameter = "10 m"\nheight = "8 m"')
    assert tank.vessel.capacity == pytest.approx(math.pi * 25 * 8, rel=1e-12)


def test_both_heads_or_each_by_itself_make_the_same_tank(site: Site) -> None:
    plain = 'kind = "horizontal cylinder"\ndiameter = "2 m"\nlength = "6 m"\n'
    head = '{ kind = "torispherical", standard = "DIN 28011" }'
    both = shaped(site, f"{plain}heads = {head}")
    each = shaped(site, f"{plain}left = {head}\nright = {head}")
    assert both.vessel.capacity == each.vessel.capacity


def test_slope_and_dip_point_are_taken(site: Site) -> None:
    plain = 'kind = "horizontal cylinder"\ndiameter = "2 m"\nlength = "6 m"\n'
    tank = shaped(site, plain + 'heads = { kind = "flat" }\nslope = 0.02\ndip_at = "1 m"')
    # The low corner is one metre of shell left of the dip point: s x above z = 0 ... -0.02 m.
    assert tank.vessel.z_min == pytest.approx(-0.02, abs=1e-6)
    percent = shaped(site, plain + 'heads = { kind = "flat" }\nslope = "2 %"\ndip_at = "1 m"')
    assert percent.vessel.z_min == tank.vessel.z_min


TABLE = '[["0 m", "2 m3"], ["1 m", "10 m3"], ["2.5 m", "25 m3"]]'


def test_a_capacity_table_is_the_same_inline_and_in_a_file(site: Site) -> None:
    inline = shaped(site, f'kind = "strapped"\ntable = {TABLE}')
    forms = {
        "plain.csv": "level [mm], volume [m3]\n0, 2\n1000, 10\n2500, 25\n",
        "semicolons.csv": "# cert 9\n\nInnage [m];Volume [L]\r\n0;2000\r\n1;10000\r\n2.5;25000\r\n",
        "tabs.csv": "dip [cm]\tvolume [m3]\n0\t2\n100\t10\n250\t25\n",
        "quantities.csv": '0 m, 2 m3\n"1 m", "10 m3"\n2.5 m, 25 m3\n',
        "falling.csv": "level [m], volume [m3]\n2.5, 25\n1, 10\n0, 2\n",
    }
    for name, text in forms.items():
        write(site.folder, f"tanks/{name}", text)
        tank = shaped(site, f'kind = "strapped"\nfile = "{name}"')
        for level in (0.0, 0.4, 1.0, 2.0, 2.5):
            assert tank.vessel.volume(level) == pytest.approx(inline.vessel.volume(level))


def test_a_table_of_ullages_is_turned_over(site: Site) -> None:
    tank = shaped(
        site,
        'kind = "strapped"\nreading = "ullage"\nreference_height = "3 m"\n'
        'table = [["0.5 m", "25 m3"], ["2 m", "10 m3"], ["3 m", "2 m3"]]',
    )
    assert tank.reference_height_m == tank.ullage_reference_m == 3.0
    assert (tank.vessel.z_min, tank.vessel.z_max) == (0.0, 2.5)
    assert tank.vessel.volume(1.0) == pytest.approx(10.0)
    write(site.folder, "tanks/u.csv", "ullage [m], volume [m3]\n0.5, 25\n2, 10\n3, 2\n")
    from_file = shaped(
        site,
        'kind = "strapped"\nreading = "ullage"\nreference_height = "3 m"\nfile = "u.csv"',
    )
    assert from_file.vessel.volume(1.7) == tank.vessel.volume(1.7)


def test_an_innage_table_may_state_where_an_ullage_is_read(site: Site) -> None:
    tank = shaped(site, f'kind = "strapped"\nreference_height = "3 m"\ntable = {TABLE}')
    assert tank.ullage_reference_m == 3.0
    assert tank.vessel.volume(1.0) == pytest.approx(10.0)


def test_the_version_of_a_tank_covers_its_table(site: Site) -> None:
    write(site.folder, "tanks/t.csv", "level [m], volume [m3]\n0, 2\n1, 10\n")
    first = shaped(site, 'kind = "strapped"\nfile = "t.csv"')
    write(site.folder, "tanks/t.csv", "level [m], volume [m3]\n0, 2\n1, 11\n")
    assert site.tank("X").version != first.version
    own, table = ((site.folder / "tanks" / name).read_bytes() for name in ("X.toml", "t.csv"))
    assert site.tank("X").version == hashlib.sha256(own + table).hexdigest()


def fluid_of(site: Site, text: str, name: str = "x") -> object:
    write(site.folder, f"fluids/{name}.toml", text)
    return site.fluid(name)


def test_every_model_of_this_version_is_read(site: Site) -> None:
    models = {
        'model = "constant"\nvalue = "845 kg/m3"': "constant",
        'model = "expansion"\nreference = "845 kg/m3"\nat = "15 degC"\n'
        'coefficient = "8.3e-4 / K"\nbulk_modulus = "1.5 GPa"': "expansion",
        'model = "table"\npoints = [["0 degC", "1004 kg/m3"], ["20 degC", "998 kg/m3"]]': "table",
        'model = "water"': "water",
        'model = "samples"\npoints = [["1 m", "860 kg/m3"], ["5 m", "852 kg/m3"]]\n'
        'beyond = "extend"': "samples",
    }
    read = {}
    for text, kind in models.items():
        write(site.folder, "fluids/x.toml", f"[density]\n{text}\n")
        (layer,) = site.fluid("x").layers
        assert (layer.model.kind, layer.top_m, layer.name) == (kind, None, "x")
        read[kind] = layer.model
    assert read["expansion"] == Expansion(845.0, 288.15, 8.3e-4, 1.5e9)
    assert read["samples"] == Samples((1.0, 5.0), (860.0, 852.0), "extend")
    assert isinstance(read["table"], Table)
    assert read["table"].temperatures_k == pytest.approx((273.15, 293.15))


LAYERS = """\
name = "Oil over water"

[[layer]]
fluid = "water"
top = "0.5 m"

[[layer]]
fluid = "oil"
"""


def test_layers_take_their_liquids_from_other_files(site: Site) -> None:
    write(site.folder, "fluids/water.toml", 'name = "Fresh water"\n[density]\nmodel = "water"\n')
    write(site.folder, "fluids/oil.toml", OIL + "\n[vapour]\ndensity = '1.4 kg/m3'\n")
    write(site.folder, "fluids/both.toml", LAYERS)
    fluid = site.fluid("both")
    assert fluid.name == "Oil over water"
    assert [(layer.name, layer.top_m, layer.model.kind) for layer in fluid.layers] == [
        ("Fresh water", 0.5, "water"),
        ("oil", None, "constant"),
    ]
    assert fluid.vapour is not None
    assert fluid.vapour.density_kg_m3 == 1.4
    parts = ((site.folder / "fluids" / f"{n}.toml").read_bytes() for n in ("both", "water", "oil"))
    assert fluid.version == hashlib.sha256(b"".join(parts)).hexdigest()


def test_a_layered_file_may_state_its_own_vapour(site: Site) -> None:
    write(site.folder, "fluids/water.toml", '[density]\nmodel = "water"\n')
    write(site.folder, "fluids/both.toml", LAYERS + "\n[vapour]\nmolar_mass = '28.01 g/mol'\n")
    vapour = site.fluid("both").vapour
    assert vapour is not None
    assert vapour.compressibility == 1.0


def test_the_fluid_of_a_tank_is_the_chosen_one_or_its_contents(site: Site) -> None:
    write(site.folder, "fluids/water.toml", '[density]\nmodel = "water"\n')
    tank = site.tank("T-101")
    assert site.fluid_for(tank, None).file == "oil"
    assert site.fluid_for(tank, "water").file == "water"
    empty = shaped(site, 'kind = "sphere"\ndiameter = "9 m"')
    with pytest.raises(ProfileError, match=r"tanks/X.toml: contents: .*Known here: oil, water"):
        site.fluid_for(empty, None)


def test_contents_that_are_not_there_are_told_when_they_are_wanted(site: Site) -> None:
    write(
        site.folder,
        "tanks/Y.toml",
        'contents = "oli"\n[shape]\nkind = "sphere"\ndiameter = "9 m"\n',
    )
    with pytest.raises(ProfileError, match=r'no fluid "oli"\. Did you mean "oil"\?'):
        site.fluid_for(site.tank("Y"), None)


@pytest.mark.parametrize(
    "name",
    [
        "../tanks/T-101",
        "..",
        ".",
        "",
        "/etc/passwd",
        "T-101.toml",
        "t-101",
        "T-101\x00",
        "T-101\n",
        "tanks/T-101",
        "\x1b[31mT-101",
        ".hidden",
        "T-101" * 2000,
        "\ud800",
    ],
)
def test_a_name_is_looked_up_and_never_made_into_a_path(site: Site, name: str) -> None:
    write(site.folder, "tanks/.hidden.toml", '[shape]\nkind = "sphere"\ndiameter = "9 m"\n')
    for look_up in (site.tank, site.fluid):
        with pytest.raises(ProfileError) as refused:
            look_up(name)
        (problem,) = refused.value.problems
        assert "there is no" in problem.what
        assert not {"\x1b", "\x00", "\n"} & set(str(problem))


def test_the_nearest_name_is_suggested(site: Site) -> None:
    with pytest.raises(ProfileError) as refused:
        site.tank("t101")
    assert str(refused.value) == 'tanks: there is no tank "t101". Did you mean "T-101"?'


def test_names_are_read_from_the_folder_alone(site: Site) -> None:
    write(site.folder, "tanks/broken.toml", "[[[")
    write(site.folder, "tanks/notes.txt", "")
    write(site.folder, "tanks/T-101.toml~", "")
    assert site.tank_names() == ["T-101", "broken"]
    assert site.fluid_names() == ["oil"]


def test_a_file_that_changes_is_read_anew(site: Site) -> None:
    before = site.tank("T-101")
    write(site.folder, "tanks/T-101.toml", EVERYTHING.replace('"13.5 m"', '"13.4 m"'))
    after = site.tank("T-101")
    assert (before.limits_m["high_high"], after.limits_m["high_high"]) == (13.5, 13.4)
    assert before.version != after.version


def test_a_broken_site_file_tells_all_its_problems(tmp_path: Path) -> None:
    write(tmp_path, "site.toml", 'nme = "x"\nunits = "si"\n')
    with pytest.raises(ProfileError) as refused:
        load_site(tmp_path)
    assert [str(problem) for problem in refused.value.problems] == [
        'site.toml:1: nme: unknown key. Did you mean "name"?',
        'site.toml:2: units: "si" is not among the choices. '
        'Choose from "metric", "us", "imperial".',
    ]


def test_loading_a_sound_tank_loads_no_models_of_pydantic_and_no_toml_writer() -> None:
    probe = (
        "from tankcalc.profiles import find_site, load_site\n"
        "site = load_site(find_site()[0])\n"
        "tank = site.tank('T-101')\n"
        "site.fluid_for(tank, None)\n"
        "import sys\nprint(*sys.modules)"
    )
    done = subprocess.run([sys.executable, "-c", probe], capture_output=True, text=True, check=True)
    loaded = set(done.stdout.split())
    assert "pydantic_core" in loaded
    assert not {"pydantic", "tomlkit", "difflib", "scipy", "pint"} & loaded
