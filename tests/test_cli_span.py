"""``tankcalc span`` as a user meets it."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from sites import TANK, make_site, run

from tankcalc.cli.main import main

LIMITS = """
[limits]
critical_high = "14.5 m"
minimum_working = "0.9 m"
"""

WET_LEGS = """\
name = "V-5"
contents = "oil"

[shape]
kind = "vertical cylinder"
diameter = "5 m"
height = "12 m"
bottom = { kind = "flat" }
roof = { kind = "flat" }

[transmitters.dp]
sensor_elevation = "0 m"
range = ["-100 kPa", "0 kPa"]
high = { elevation = "1 m", fill_density = "960 kg/m3", fill_density_at = "25 degC", \
fill_expansion = "1.08e-3 / K" }
low = { elevation = "11 m", fill_density = "960 kg/m3", fill_density_at = "25 degC", \
fill_expansion = "1.08e-3 / K" }

[vapour]
density = "0 kg/m3"
"""

ACID = """\
name = "Concentrated acid with a very long name"

[density]
model = "constant"
value = "1840 kg/m3"
"""


@pytest.fixture
def site(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    for name in ("TANKCALC_PROFILES", "TANKCALC_LOG"):
        monkeypatch.delenv(name, raising=False)
    folder = make_site(tmp_path / "site")
    (folder / "tanks" / "V-1.toml").write_text(TANK + LIMITS)
    (folder / "tanks" / "V-5.toml").write_text(WET_LEGS)
    (folder / "fluids" / "acid.toml").write_text(ACID)
    return folder


def call(capsys: pytest.CaptureFixture[str], site: Path, *words: str) -> tuple[int, str, str]:
    """Run ``span`` in this process: its exit code, standard output, standard error."""
    try:
        code = main(["--profiles", str(site), "span", *words])
    except SystemExit as left:
        code = int(str(left.code))
    out, err = capsys.readouterr()
    return code, out, err


def answered(capsys: pytest.CaptureFixture[str], site: Path, *words: str) -> Any:
    code, out, err = call(capsys, site, *words, "--json")
    assert (code, err) == (0, "")
    return json.loads(out)


def test_the_table_of_an_open_tank_checked_by_hand(
    site: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    # 9.81 (850 - 1.2) Pa for each metre above the tap at 0.5 m; 160 kPa are 16 mA.
    code, out, err = call(capsys, site, "V-1")
    assert (code, err) == (0, "")
    assert out == (
        "V-1, filled with Oil 850.00 kg/m3; above the liquid: outside air.\n"
        "\n"
        "p1, gauge, tap at 0.500 m\n"
        "  at                  level      reading     signal  of range\n"
        "  empty             0.000 m    0.000 kPa   4.000 mA    0.00 %\n"
        "  tap               0.500 m    0.000 kPa   4.000 mA    0.00 %\n"
        "  minimum working   0.900 m    3.331 kPa   4.333 mA    2.08 %\n"
        "  critical high    14.500 m  116.574 kPa  15.657 mA   72.86 %\n"
        "  full             15.000 m  120.738 kPa  16.074 mA   75.46 %\n"
        "  To set: 0.000 kPa (LRV, 4 mA) to 125.000 kPa (URV, 20 mA): 0.000 kPa to\n"
        "    120.738 kPa, rounded outward to 5.000 kPa.\n"
        "  Present range: 0.000 kPa to 160.000 kPa covers that, and 75.5 % of it is\n"
        "    used.\n"
        "\n"
        "Not a safety function, not certified for custody transfer. Local codes and\n"
        "  licensed practice decide.\n"
    )


def test_wet_legs_are_negative_and_said_to_be_right(
    site: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    code, out, _ = call(capsys, site, "V-5", "--leg-temperature", "25 degC")
    assert code == 0
    assert "dp, differential, taps at 1.000 m and 11.000 m" in out
    assert "empty      0.000 m  -94.176 kPa   4.932 mA    5.82 %" in out
    assert "full      12.000 m  -10.791 kPa  18.273 mA   89.21 %" in out
    assert "-96.000 kPa (LRV, 4 mA) to -10.000 kPa (URV, 20 mA)" in out
    assert "Every reading is negative, and so is the right range" in out


def test_two_liquids_one_below_the_other_at_each_level(
    site: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    words = ("V-1", "--fluid", "acid", "--fluid", "oil", "--fluid", "acid")
    code, out, _ = call(capsys, site, *words)
    assert code == 0
    lines = [" ".join(line.split()) for line in out.splitlines()]
    full = lines.index("full 15.000 m 120.738 kPa 16.074 mA 75.46 % Oil")
    assert lines[full + 1].startswith("261.560 kPa > 20.5 mA 163.48 % Concentrated")
    assert lines[full + 2].startswith("To set: 0.000 kPa (LRV, 4 mA) to 270.000 kPa (URV")
    assert "empty 0.000 m 0.000 kPa 4.000 mA 0.00 % any" in lines
    assert "DOES NOT COVER" in out


def test_json_is_in_si(site: Path, capsys: pytest.CaptureFixture[str]) -> None:
    answer = answered(capsys, site, "V-1", "--units", "us")
    (p1,) = answer["transmitters"]
    full = p1["points"][-1]
    assert (full["at"], full["level_m"]) == ("full", 15.0)
    assert full["readings"][0]["reading_pa"] == pytest.approx(9.81 * 848.8 * 14.5)
    assert full["readings"][0]["current_a"] == pytest.approx(0.01607376, abs=1e-8)
    # A round figure in the units of the site: 17.5 psi, not 125 kPa.
    assert p1["to_set"]["urv_pa"] == pytest.approx(18.0 * 6894.757293, rel=1e-9)
    assert p1["covered"] is True


def test_a_blanket_is_added_where_it_is_given(
    site: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    without = call(capsys, site, "V-3")[1]
    assert "above the liquid: outside air" in without
    assert "p3 was not read" in without
    assert "Widen it by what that pressure rises and falls" in " ".join(without.split())
    answer = answered(capsys, site, "V-3", "--p3", "20 kPa", "--tag", "p1")
    (p1,) = answer["transmitters"]
    assert p1["lowest_pa"] == pytest.approx(20_000.0)


@pytest.mark.parametrize("means", ["37.2 %", "9.952 mA", "59.52 kPa", "8.632646 psi"])
def test_the_way_back_is_what_convert_answers(
    site: Path, capsys: pytest.CaptureFixture[str], means: str
) -> None:
    answer = answered(capsys, site, "V-1", "--means", means)
    assert answer["reading_pa"] == pytest.approx(59_520.0, rel=1e-7)
    assert answer["share"] == pytest.approx(0.372, rel=1e-7)
    assert answer["current_a"] == pytest.approx(0.009952, rel=1e-7)
    (found,) = answer["answers"]
    assert found["level_m"] == pytest.approx(0.5 + 59_520.0 / (9.81 * 848.8), rel=1e-7)
    assert main(["--profiles", str(site), "convert", "V-1", "--p1", means, "--json"]) == 0
    assert found == json.loads(capsys.readouterr().out)


def test_the_way_back_as_text(site: Path, capsys: pytest.CaptureFixture[str]) -> None:
    words = ("V-1", "--means", "37.2 %", "--fluid", "oil", "--fluid", "acid")
    code, out, _ = call(capsys, site, *words)
    assert code == 0
    assert 'V-1: "37.2 %" of p1 is 59.520 kPa, 9.952 mA, 37.20 % of its range.' in out
    oil, acid = out.index("With Oil:"), out.index("With Concentrated acid")
    # 0.5 m + 59 520 Pa / (9.81 (rho - 1.2)), in a tank of 314.159 m2.
    assert "level              7.648 m  +/- " in out[oil:acid]
    assert "2402.71 m3" in out[oil:acid]
    assert "2042.304 t" in out[oil:acid]
    assert "3.800 m" in out[acid:]


def test_a_dp_alone_is_what_is_meant(site: Path, capsys: pytest.CaptureFixture[str]) -> None:
    words = ("V-5", "--means", "-52.4835 kPa", "--leg-temperature", "25 degC")
    answer = answered(capsys, site, *words)
    assert answer["tag"] == "dp"
    # Half way between -94.176 and -10.791 kPa, the surface is half way between the taps.
    assert answer["answers"][0]["level_m"] == pytest.approx(6.0, abs=1e-9)


def test_a_failed_signal_means_nothing(site: Path, capsys: pytest.CaptureFixture[str]) -> None:
    code, out, err = call(capsys, site, "V-1", "--means", "3.5 mA")
    assert (code, err) == (3, "")
    assert "failed transmitter" in out
    assert "level " not in out
    code, out, err = call(capsys, site, "V-1", "--means", "107 %", "--json")
    answer = json.loads(out)
    assert code == 3
    assert (answer["signal"], answer["reading_pa"]) == ("failed", None)
    assert answer["answers"][0]["level_m"] is None
    assert err.startswith("tankcalc: ")


def test_a_signal_near_its_end_is_read_with_a_warning(
    site: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (site / "tanks" / "V-6.toml").write_text(TANK.replace("160 kPa", "80 kPa"))
    answer = answered(capsys, site, "V-6", "--means", "20.4 mA")
    assert answer["signal"] == "saturated"
    warnings = {notice["code"] for notice in answer["answers"][0]["warnings"]}
    assert "signal_saturated" in warnings


@pytest.mark.parametrize(
    ("words", "code", "says"),
    [
        (("V-9",), 2, "V-9"),
        (("V-1", "--fluid", "oli"), 2, "oil"),
        (("V-1", "--tag", "p2"), 2, "no p2 transmitter. Fitted: p1."),
        (("V-1", "--tag", "p4"), 2, "p4"),
        (("V-1", "--means", "37.2"), 2, "--means"),
        (("V-1", "--means", " "), 2, "--means is empty"),
        (("V-1", "--means", "5 m"), 2, "length"),
        (("V-1", "--means", "1.4 bara"), 2, "p1 reads gauge pressure"),
        (("V-1", "--means", "3 kPa", "--tag", "dp"), 2, "no dp transmitter"),
        (("V-1", "--means", "300 kPa"), 3, "above what a full V-1 can show"),
        (("V-1", "--means", "-1 %"), 3, "below 0.500 m"),
        (("V-3", "--means", "12 mA"), 3, "Give p3, or a dip"),
        (("V-3", "--means", "2 kPa", "--tag", "p3"), 3, "Nothing was given that fixes"),
        (("V-3", "--means", "2 kPa", "--tag", "p3", "--p3", "1 kPa"), 2, "Leave one out"),
        (("V-1", "--p3", "1 kPa"), 2, "no p3 transmitter"),
        (("V-3", "--p3", "3.2 mA"), 2, "not a sound signal"),
        (("V-3", "--p3", "3.7 mA"), 2, "no range"),
        (("V-3", "--p3", "-2 bar"), 3, "below a perfect vacuum"),
        (("V-3", "--p3", ""), 2, "--p3 is empty"),
        (("V-1", "--temperature", "warm"), 2, "--temperature"),
        (("V-1", "--barometer", "3 hPa"), 2, "--barometer"),
        (("V-1", "--level", "3 m"), 2, "unrecognized arguments"),
    ],
)
def test_refusals_say_why_and_leave_with_their_code(
    site: Path,
    capsys: pytest.CaptureFixture[str],
    words: tuple[str, ...],
    code: int,
    says: str,
) -> None:
    found, out, err = call(capsys, site, *words)
    assert found == code
    assert says in " ".join((out + err).split())
    assert "defect" not in err


@pytest.mark.parametrize("option", ["--means", "--p3", "--fluid", "--tag", "--leg-temperature"])
@pytest.mark.parametrize(
    "text",
    ["\x1b[31mred", "1e999 mA", "nan %", "inf kPa", "--", "9" * 5000, "12\u202emA", "../../oil"],
)
def test_hostile_words_are_messages(
    site: Path, capsys: pytest.CaptureFixture[str], option: str, text: str
) -> None:
    code, out, err = call(capsys, site, "V-3", f"{option}={text}")
    assert code == 2
    assert out == ""
    assert "defect" not in err
    assert "\x1b" not in err
    assert "\u202e" not in err
    assert len(err) < 1500


@pytest.mark.parametrize("system", ["metric", "us", "imperial"])
@pytest.mark.parametrize("tank", ["V-1", "V-3", "V-5"])
def test_nothing_is_wider_than_a_terminal(
    site: Path, capsys: pytest.CaptureFixture[str], tank: str, system: str
) -> None:
    both = ("--fluid", "oil", "--fluid", "acid", "--units", system, "--leg-temperature", "9 degC")
    for more in ((), ("--means", "-20 kPa"), ("--means", "30 kPa")):
        _, out, err = call(capsys, site, tank, *both, *more)
        assert err == ""
        assert max(map(len, out.splitlines())) < 80


def test_a_tank_without_transmitters_has_nothing_to_set(
    site: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    bare = TANK.split("[transmitters", maxsplit=1)[0]
    (site / "tanks" / "V-7.toml").write_text(bare)
    code, _, err = call(capsys, site, "V-7")
    assert code == 2
    assert "no pressure transmitter" in err


def test_help_names_the_command(tmp_path: Path) -> None:
    done = run(tmp_path, "--help")
    assert "span" in done.stdout
    done = run(tmp_path, "span", "--help")
    assert done.returncode == 0
    assert "shows 70.7 % where 50 % is meant" in " ".join(done.stdout.split())
