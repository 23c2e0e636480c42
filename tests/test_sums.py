"""The working: the worked chain in both roundings, and that it ends where the answer does."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from tanks import around, single, stacked, transmitters, upright

from tankcalc.cli.main import main
from tankcalc.fluids.fluid import Fluid, Layer
from tankcalc.fluids.petroleum import Petroleum
from tankcalc.fluids.table import Table
from tankcalc.fluids.vapour import Vapour
from tankcalc.fluids.water import Water
from tankcalc.gauging import evaluate
from tankcalc.geometry import ConeEnd, FlatEnd, horizontal_cylinder, sphere, vertical_cylinder
from tankcalc.readings import Readings
from tankcalc.report import sums_table
from tankcalc.sums import Sums, sums
from tankcalc.sums.book import half_up
from tankcalc.tank import FloatingRoof, Shell, Tank

GAS_OIL = Petroleum("fuel oil", 845.0, 288.15)
SHELL = Shell(expansion_per_k=1.12e-5, calibrated_at_k=288.15)
CHAIN = Readings(
    level_m=12.0,
    water_level_m=0.04,
    temperatures=((None, 305.65),),
    air_temperature_k=291.15,
    sediment_water=0.001,
)
"""The worked chain of common training texts: D 20 m, 12 m, 40 mm of water, 32.5 and 18 degC,
0.10 % of sediment and water, 845.0 kg/m3 at 15 degC; its figures were computed apart from this
program."""

PRINTED = {
    "TOV": 3769.911, "FW": 12.566, "TSh": 31.0, "CTSh": 1.00036, "GOV": 3758.698,
    "CTL": 0.98528, "GSV": 3703.370, "CSW": 0.99900, "NSV": 3699.666, "M": 3126.218,
    "W": 3122.247,
}  # fmt: skip


def by_symbol(found: Sums) -> dict[str, float]:
    return {line.symbol: line.value for line in found.lines}


def test_the_worked_chain_as_printed() -> None:
    found = by_symbol(sums(upright(shell=SHELL), single(GAS_OIL), CHAIN, "as printed"))
    assert found == PRINTED


def test_the_worked_chain_unrounded() -> None:
    found = by_symbol(sums(upright(shell=SHELL), single(GAS_OIL), CHAIN, "unrounded"))
    assert found["TSh"] == pytest.approx(30.6875)
    assert found["CTL"] == pytest.approx(0.9852842, abs=5e-8)
    assert found["NSV"] == pytest.approx(3699.650, abs=5e-4)


def test_a_half_goes_up_once_and_away_from_zero() -> None:
    assert half_up(1.000345, 5) == 1.00035
    assert half_up(0.984995, 5) == 0.985
    assert half_up(-2.5, 0) == -3.0
    assert half_up(1.0000449, 5) == 1.00004  # not first to 1.000045


ROOF = FloatingRoof(150_000.0, 1.5, 2.2)
PLATES = replace(SHELL, thickness_m=(0.011,), courses_m=((0.0, 15.0, 10.0),))
CASES: list[tuple[Tank, Any, Readings]] = [
    (upright(shell=SHELL), single(GAS_OIL), CHAIN),
    (upright(shell=PLATES), single(GAS_OIL), CHAIN),
    (upright(shell=PLATES, floating_roof=ROOF), single(GAS_OIL), CHAIN),
    (upright(shell=SHELL, floating_roof=replace(ROOF, included_at_kg_m3=850.0)), single(GAS_OIL),
     CHAIN),
    (upright(vessel=sphere(13.0), shell=SHELL), single(GAS_OIL), CHAIN),
    (upright(vessel=horizontal_cylinder(13.0, 30.0, FlatEnd(), FlatEnd()), shell=SHELL),
     single(GAS_OIL), replace(CHAIN, temperatures=((1.0, 300.0), (9.0, 310.0)))),
    (upright(vessel=vertical_cylinder([(15.0, 20.0)], ConeEnd(1.0), FlatEnd())), single(GAS_OIL),
     replace(CHAIN, density_kg_m3=846.0)),
    (upright(), Fluid("two", (Layer("water", Water(), 0.3), Layer("a", GAS_OIL, 5.0),
                              Layer("b", Petroleum("fuel oil", 840.0, 288.15)))), CHAIN),
    (upright(), single(850.0), replace(CHAIN, ctl=0.99)),
]  # fmt: skip


@pytest.mark.parametrize("case", range(len(CASES)))
@pytest.mark.parametrize("from_pressure", [False, True])
def test_unrounded_the_working_ends_where_the_answer_does(case: int, from_pressure: bool) -> None:
    tank, fluid, read = CASES[case]
    if from_pressure:
        at_level = evaluate(tank, fluid, read)
        read = replace(read, level_m=None, p1_pa=at_level.p1_pa)
    answer = evaluate(tank, fluid, read)
    found = by_symbol(sums(tank, fluid, read, "unrounded"))
    assert found["GOV"] == pytest.approx(answer.product_volume_m3, rel=1e-9)
    assert found["GSV"] == pytest.approx(answer.standard_volume_m3, rel=1e-9)
    assert found["NSV"] == pytest.approx(answer.net_standard_volume_m3, rel=1e-9)
    assert found["M"] * 1000.0 == pytest.approx(answer.net_mass_kg, rel=1e-9)
    assert found["W"] * 1000.0 == pytest.approx(answer.net_weight_in_air_kg, rel=1e-9)
    assert ("GM" in found) == from_pressure
    assert "CTL" in found
    if from_pressure:
        assert found["L"] == pytest.approx(answer.level_m, rel=1e-12)
        assert found["GM"] * 1000.0 == pytest.approx(answer.product_mass_kg, rel=1e-9)


@pytest.mark.parametrize("case", range(len(CASES)))
@pytest.mark.parametrize("system", ["metric", "us", "imperial"])
def test_rounding_is_all_that_parts_the_two(case: int, system: Any) -> None:
    tank, fluid, read = CASES[case]
    printed = by_symbol(sums(tank, fluid, read, "as printed", system))
    exact = by_symbol(sums(tank, fluid, read, "unrounded", system))
    assert printed.keys() == exact.keys()
    for symbol in ("GOV", "GSV", "NSV", "M", "W"):
        assert printed[symbol] == pytest.approx(exact[symbol], rel=1.5e-4)


def test_a_calculator_follows_every_line() -> None:
    """The figures printed, put into the working printed, give the next line's last digit but one.

    Printed volumes are not fed back, so that the last digit may differ by one.
    """
    found = sums(upright(shell=SHELL), single(GAS_OIL), CHAIN)
    lines, value = {line.symbol: line for line in found.lines}, by_symbol(found)
    assert lines["TSh"].working == "(7 x 32.5 + 18.0) / 8"
    assert half_up((7 * 32.5 + 18.0) / 8, 0) == value["TSh"]
    assert lines["CTSh"].working == "(1 + 1.12e-05 x (31 - 15))^2"
    assert half_up((1 + 1.12e-05 * (31 - 15)) ** 2, 5) == value["CTSh"]
    observed = (value["TOV"] - value["FW"]) * value["CTSh"]
    assert half_up(observed, 3) == value["GOV"]
    assert value["GOV"] * value["CTL"] == pytest.approx(value["GSV"], abs=1.1e-3)
    assert value["GSV"] * value["CSW"] == pytest.approx(value["NSV"], abs=1.1e-3)
    assert value["NSV"] * 845.0 / 1000.0 == pytest.approx(value["M"], abs=1.1e-3)
    assert "API MPMS 11.1-2004" in lines["CTL"].working
    assert "845.0 kg/m3 at 15 degC, liquid at 32.5 degC" in lines["CTL"].working
    assert lines["FW"].working == "table at 0.040 m"


def test_a_calculator_follows_from_the_pressure() -> None:
    """The mass comes first: head, areal mass, level, table, density; the volumes follow."""
    read = replace(CHAIN, level_m=None, p1_pa=90_000.0)
    found = sums(upright(shell=SHELL), single(GAS_OIL), read)
    lines, value = {line.symbol: line for line in found.lines}, by_symbol(found)
    assert "p1 reads 90.000 kPa" in " ".join(lines["dP"].working.split())
    assert value["dP"] * 1000.0 / 9.81 == pytest.approx(value["MA"], rel=1e-7)
    tap, mean = lines["L"].working.split(" m (tap) + MA / ")
    assert float(tap) + value["MA"] / float(mean.split()[0]) == pytest.approx(value["L"], abs=6e-4)
    assert value["GOV"] * value["RHO"] / 1000.0 == pytest.approx(value["GM"], abs=2e-3)
    assert value["GM"] * 1000.0 / 845.0 == pytest.approx(value["GSV"], abs=2e-3)
    assert value["RHO"] / 845.0 == pytest.approx(value["CTL"], abs=6e-6)
    for symbol in ("RHO", "CTL"):
        assert "API MPMS 11.1-2004, fuel oil" in lines[symbol].working
    answer = evaluate(upright(shell=SHELL), single(GAS_OIL), read)
    assert value["GM"] * 1000.0 == pytest.approx(answer.product_mass_kg, abs=2.0)


def test_the_user_s_own_factor_is_printed_also_from_a_pressure() -> None:
    read = replace(CHAIN, level_m=None, p1_pa=90_000.0, ctl=0.9843217)
    found = sums(upright(), single(GAS_OIL), read)
    lines = {line.symbol: line for line in found.lines}
    assert lines["CTL"].working == "the user's own factor"
    answer = evaluate(upright(), single(GAS_OIL), read)
    assert lines["GSV"].value == pytest.approx(answer.standard_volume_m3, rel=6e-6)


def test_barrels_are_brought_to_cubic_metres_in_the_open() -> None:
    found = sums(upright(floating_roof=ROOF), single(GAS_OIL), CHAIN, "as printed", "us")
    lines = {line.symbol: line for line in found.lines}
    assert "0.158987294928 m3/bbl" in lines["M"].working
    assert "0.158987294928 m3/bbl" in lines["FRA"].working
    mass = lines["NSV"].value * 0.158987294928 * 845.0 / 1000.0
    assert mass == pytest.approx(lines["M"].value, abs=1e-2)


@pytest.mark.parametrize(
    ("model", "kelvin"),
    [
        (Petroleum("fuel oil", 838.32, 288.7055555555556), 305.65),
        (Petroleum("jet fuel", 787.52, 288.7055555555556), 305.65),
        (Table((280.0, 313.2), (850.0, 830.0)), 313.2),
    ],
)
def test_rounding_does_not_put_the_working_outside_the_limits(model: Any, kelvin: float) -> None:
    read = Readings(level_m=10.0, temperatures=((None, kelvin),))
    tank = upright()
    answer = evaluate(tank, single(model), read)
    assert answer.standard_volume_m3 is not None
    found = by_symbol(sums(tank, single(model), read))
    assert found["GSV"] == pytest.approx(answer.standard_volume_m3, rel=2e-4)


def test_water_that_is_not_reached_is_no_more_than_the_liquid() -> None:
    fluid = stacked((1000.0, 0.5), (850.0, None))
    for level in (0.0, 0.2):
        found = by_symbol(sums(upright(), fluid, Readings(level_m=level)))
        assert found["GOV"] == pytest.approx(0.0, abs=1e-9)


def test_the_table_of_a_sphere_is_read_where_the_auditor_can_read_it() -> None:
    tank = upright(vessel=sphere(12.0), shell=replace(SHELL, insulated=True))
    read = Readings(level_m=6.0, temperatures=((None, 333.15),))
    line = sums(tank, single(GAS_OIL), read).lines[0]
    at = float(line.working.removeprefix("table at ").split()[0])
    assert sphere(12.0).volume(at) == pytest.approx(line.value, abs=0.02)


def test_barrels_and_fahrenheit() -> None:
    found = {
        line.symbol: line
        for line in sums(upright(shell=SHELL), single(GAS_OIL), CHAIN, "as printed", "us").lines
    }
    assert (found["GOV"].unit, found["GOV"].places) == ("bbl", 2)
    # 3758.698 m3 are 23 641.5 barrels; the shell's temperature is rounded to a whole degF.
    assert found["GOV"].value == pytest.approx(3758.698 / 0.158987294928, rel=2e-5)
    assert (found["TSh"].value, found["TSh"].unit) == (87.0, "degF")


def test_refused_readings_have_no_working() -> None:
    assert sums(upright(), single(GAS_OIL), Readings(level_m=99.0)).lines == ()
    critical = Readings(level_m=1.8, temperatures=((None, 300.0),))
    found = sums(upright(floating_roof=ROOF), single(GAS_OIL), critical)
    assert found.lines == ()
    assert "no working" in sums_table(found)


def test_a_liquid_without_a_base_has_mass_and_weight_and_is_told_why_no_more() -> None:
    read = Readings(level_m=5.0, sediment_water=0.01)
    found = sums(upright(), single(850.0), read)
    assert [line.symbol for line in found.lines] == ["TOV", "GOV", "RHO", "GM", "W"]
    assert "no standard volume" in sums_table(found).lower()
    answer = evaluate(upright(), single(850.0), read)
    assert by_symbol(found)["W"] * 1000.0 == pytest.approx(answer.weight_in_air_kg, abs=0.6)
    assert [n.code for n in answer.warnings] == ["sediment_water_unused"]
    tank = upright(transmitters=transmitters(p1=0.0))
    by_mass = by_symbol(sums(tank, single(850.0), Readings(p1_pa=80_000.0)))
    assert list(by_mass) == ["dP", "MA", "L", "TOV", "GOV", "RHO", "GM", "W"]


def test_layers_under_pressure_and_all_the_rest_fit_the_terminal() -> None:
    pressed = upright(
        vessel=sphere(13.0),
        transmitters=transmitters(p1=0.5, p3=13.0),
        vapour=Vapour(5.0),
        surroundings=around(),
    )
    light = Petroleum("crude", 650.0, 288.15)
    read = Readings(level_m=6.0, p3_pa=500_000.0, temperatures=((None, 305.65),))
    table = sums_table(sums(pressed, single(light), read))
    assert "CPL" in table
    assert "500.000 kPa gauge" in " ".join(table.split())
    table += "\n" + sums_table(
        sums(upright(), stacked((1000.0, 0.5), (850.0, None)), CHAIN, "unrounded")
    )
    table += "\n" + sums_table(sums(upright(shell=PLATES), single(GAS_OIL), CHAIN))
    assert max(len(line) for line in table.splitlines()) < 80


SITE = {
    "site.toml": '[air]\ntemperature = "18 degC"\n',
    "tanks/T.toml": 'contents = "oil"\n[shape]\nkind = "vertical cylinder"\ndiameter = "20 m"\n'
    'height = "15 m"\n[shell]\nexpansion = "1.12e-5 / K"\ncalibrated_at = "15 degC"\n',
    "fluids/oil.toml": '[density]\nmodel = "petroleum"\ngroup = "fuel oil"\n'
    'reference = "845 kg/m3"\nat = "15 degC"\n',
}
ASKED = ["T", "--level", "12 m", "--water-level", "40 mm", "--temperature", "32.5 degC",
         "--sediment-water", "0.1 %", "--sums"]  # fmt: skip


@pytest.fixture
def site(tmp_path: Path) -> Path:
    for name, text in SITE.items():
        path = tmp_path / name
        path.parent.mkdir(exist_ok=True)
        path.write_text(text)
    return tmp_path


def test_convert_prints_the_working(site: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["convert", "--profiles", str(site), *ASKED]) == 0
    shown = capsys.readouterr().out
    assert "rounded as printed in the standards (once, half up)" in shown
    assert "3699.666 m3  GSV x CSW" in shown
    assert main(["convert", "--profiles", str(site), *ASKED, "--rounding", "none"]) == 0
    shown = capsys.readouterr().out
    assert "unrounded" in shown
    assert "3699.65" in shown


def test_convert_gives_the_working_as_json(site: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["convert", "--profiles", str(site), *ASKED, "--json"]) == 0
    data = json.loads(capsys.readouterr().out)
    assert data["sums"]["rounding"] == "as printed"
    values = {line["symbol"]: line["value"] for line in data["sums"]["lines"]}
    assert values == PRINTED
    assert data["net_standard_volume_m3"] == pytest.approx(3699.650, abs=5e-4)
    assert data["ctsh"] == pytest.approx(1.00035143, abs=5e-9)
