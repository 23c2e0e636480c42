"""``tankcalc plan`` as a user meets it."""

from __future__ import annotations

import json
import math
import re
from pathlib import Path
from typing import Any

import pytest
from sites import TANK, make_site, run

from tankcalc.cli.main import main

AREA_M2 = math.pi * 100.0
LIMITS = """
[limits]
critical_high = "14.5 m"
high_high = "14.0 m"
maximum_working = "13.6 m"
minimum_working = "0.9 m"
"""
GAS_OIL = """\
name = "Gas oil"

[density]
model = "expansion"
reference = "845 kg/m3"
at = "15 degC"
coefficient = "8.3e-4 / K"
"""


@pytest.fixture
def site(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    for name in ("TANKCALC_PROFILES", "TANKCALC_LOG"):
        monkeypatch.delenv(name, raising=False)
    folder = make_site(tmp_path / "site")
    (folder / "tanks" / "V-1.toml").write_text(TANK + LIMITS)
    (folder / "fluids" / "gas-oil.toml").write_text(GAS_OIL)
    return folder


@pytest.fixture
def plan(site: Path, capsys: pytest.CaptureFixture[str]) -> Any:
    def call(*words: str, tank: str = "V-1") -> tuple[int, str, str]:
        try:
            code = main(["--profiles", str(site), "plan", tank, *words])
        except SystemExit as left:
            code = int(str(left.code))
        out, err = capsys.readouterr()
        return code, out, err

    return call


def planned(plan: Any, *words: str) -> dict[str, Any]:
    code, out, err = plan(*words, "--json")
    assert (code, err) == (0, "")
    found: dict[str, Any] = json.loads(out)
    return found


OIL = ("--fluid", "gas-oil", "--temperature", "15 degC")


def test_room_to_every_limit_and_what_can_be_received(plan: Any) -> None:
    found = planned(plan, "--level", "5 m", *OIL)
    rooms = {one["limit"]: one["room_m3"] for one in found["limits"]}
    assert rooms["maximum_working"] == pytest.approx(8.6 * AREA_M2)
    assert rooms["minimum_working"] == pytest.approx(-4.1 * AREA_M2)
    assert found["receivable"]["mass_kg"] == pytest.approx(8.6 * AREA_M2 * 845.0)
    assert found["receivable"]["standard_m3"] == pytest.approx(8.6 * AREA_M2)
    assert found["ullage_volume_m3"] == pytest.approx(10.0 * AREA_M2)
    for key in ("stop", "after", "at_design_temperature", "highest_now_m"):
        assert found[key] is None
    assert found["times"] == []


def test_times_and_the_call_for_stop(plan: Any) -> None:
    found = planned(
        plan, "--level", "5 m", *OIL, "--rate", "600 m3/h", "--rate-uncertainty", "6 m3/h",
        "--closing-time", "90 s", "--drain-back", "4 m3", "--to", "high-high",
        "--next-reading", "1 h",
    )  # fmt: skip
    by_limit = {one["limit"]: one for one in found["times"]}
    high = by_limit["high_high"]
    assert high["expected_s"] == pytest.approx(9.0 * AREA_M2 * 6.0)
    assert high["earliest_s"] < high["expected_s"] < high["latest_s"]
    assert high["extrapolates"] is True
    assert by_limit["minimum_working"]["expected_s"] is None
    margin = 612.0 * 90.0 / 3600.0 + 4.0
    assert found["stop"]["margin_m3"] == pytest.approx(margin)
    assert found["stop"]["call_m"] == pytest.approx(14.0 - margin / AREA_M2)
    assert found["question"]["limit"] == "high_high"
    assert {n["code"] for n in found["warnings"]} == set()


def test_a_rate_as_mass_goes_by_the_density_and_out_goes_to_the_low_limit(plan: Any) -> None:
    found = planned(plan, "--level", "5 m", *OIL, "--rate", "-84.5 t/h")
    assert found["question"]["flow_m3_s"] == pytest.approx(-100.0 / 3600.0)
    assert found["question"]["limit"] == "minimum_working"
    assert found["stop"]["call_m"] == pytest.approx(0.9)
    codes = {n["code"] for n in found["warnings"]}
    assert codes == {"rate_taken_as_exact", "next_reading_unknown"}


def test_the_site_says_when_it_is_read_next(site: Path, plan: Any) -> None:
    with (site / "site.toml").open("a") as file:
        file.write('\n[rates]\nread_every = "2 h"\n')
    found = planned(plan, "--level", "5 m", *OIL, "--rate", "600 m3/h")
    assert found["question"]["next_reading_s"] == 7200.0
    assert all(one["extrapolates"] for one in found["times"][1:])


def test_adding_500_t_at_25_degrees(plan: Any) -> None:
    found = planned(
        plan, "--level", "5 m", *OIL, "--add", "500 t", "--at-temperature", "25 degC",
        "--design-temperature", "45 degC",
    )  # fmt: skip
    held = 5.0 * AREA_M2 * 845.0
    mean = (held * 15.0 + 5e5 * 25.0) / (held + 5e5)
    volume = (held + 5e5) / 845.0 * (1.0 + 8.3e-4 * (mean - 15.0))
    assert found["after"]["level_m"] == pytest.approx(volume / AREA_M2)
    assert found["after"]["temperature_k"] == pytest.approx(mean + 273.15)
    grown = (held + 5e5) / 845.0 * (1.0 + 8.3e-4 * 30.0)
    assert found["at_design_temperature"]["volume_m3"] == pytest.approx(grown)
    assert found["highest_now_m"] == pytest.approx(13.6 / (1.0 + 8.3e-4 * 30.0))
    assert [n["code"] for n in found["warnings"]] == ["mixing_assumed"]
    apart = planned(plan, "--level", "5 m", *OIL, "--add", "500 t", "--not-mixed")
    assert apart["after"]["mass_kg"] == pytest.approx(held + 5e5)


def test_a_receipt_as_volume_counts_at_the_temperature_it_arrives_with(plan: Any) -> None:
    words = ("--level", "5 m", *OIL, "--add", "600 m3", "--at-temperature", "25 degC")
    found = planned(plan, *words)
    mass = 600.0 * 845.0 / (1.0 + 8.3e-4 * 10.0)
    assert found["question"]["added_kg"] == pytest.approx(mass)
    taken = planned(plan, "--level", "5 m", *OIL, "--add", "-600 m3")
    assert taken["after"]["level_m"] == pytest.approx(5.0 - 600.0 / AREA_M2)


def test_any_reading_will_do(plan: Any) -> None:
    p1 = 9.81 * (850.0 - 1.2) * 4.5
    found = planned(plan, "--p1", f"{p1} Pa", "--to", "13 m")
    assert found["level_m"] == pytest.approx(5.0)
    assert found["receivable"]["room_m3"] == pytest.approx(8.0 * AREA_M2)
    assert found["question"]["limit"] == ""
    assert found["question"]["level_uncertainty_m"] > 0.0


WHOLE = (
    "--level", "5 m", *OIL, "--rate", "120 m3/h", "--add", "500 t", "--at-temperature", "25 degC",
    "--design-temperature", "45 degC", "--closing-time", "60 s", "--next-reading", "1 h",
)  # fmt: skip


@pytest.mark.parametrize("system", ["metric", "us", "imperial"])
def test_the_text_fits_the_terminal_and_ends_with_the_caution(plan: Any, system: str) -> None:
    code, out, err = plan(*WHOLE, "--units", system)
    assert (code, err) == (0, "")
    assert max(len(line) for line in out.splitlines()) <= 80
    assert "This plan stops nothing and watches nothing" in out
    assert out.rstrip().endswith("practice decide.")
    assert "complies" not in out


def test_times_of_many_days_keep_their_columns(plan: Any) -> None:
    # By hand: 3.6 m of a tank 20 m wide are 1131 m3, at 4 m3/h 11 days and 18 hours.
    code, out, err = plan(
        "--level", "10 m", *OIL, "--rate", "4 m3/h", "--rate-uncertainty", "0.04 m3/h",
        "--next-reading", "1 h",
    )  # fmt: skip
    assert (code, err) == (0, "")
    lines = out.splitlines()
    assert max(map(len, lines)) < 80
    head = next(line for line in lines if "at the latest" in line)
    rows = [line for line in lines if re.search(r"\d d \d+ h.*\*$", line)]
    assert len(rows) == 3
    column = head.index("at the latest")
    assert all(line[column - 1] == " " and line[column] != " " for line in rows)


def test_the_text_says_what_is_asked_for(plan: Any) -> None:
    _, out, _ = plan(*WHOLE)
    rows = [" ".join(line.split()) for line in out.splitlines()]
    assert "V-1, Gas oil: plan from 5.000 m" in rows
    assert "Can be received up to maximum working, 13.600 m, arriving at 25.0 degC:" in rows
    assert "call stop at 13.594 m" in rows  # 2 m3 on 314 m2
    assert "After adding 500.000 t at 25.0 degC:" in rows
    assert "At 45.0 degC, with what is added or taken out:" in rows
    assert any(row.startswith("minimum working 0.900 m -1288.05 m3 not on the way") for row in rows)
    assert "* beyond the next planned reading: only if the rate stays what it is" in rows


def test_the_text_of_a_tank_that_is_past_its_limit(plan: Any) -> None:
    _, out, _ = plan("--level", "14.2 m", *OIL, "--rate", "600 m3/h", "--add", "800 t")
    assert "To maximum working, 13.600 m: nothing can be received." in out
    assert "reached already" in out
    assert "now; its level, 13.600 m, is passed" in out
    assert "does not fit, by" in out


@pytest.mark.parametrize(
    ("words", "told"),
    [
        (("--level", "5 m", "--to", "low-low"), "V-1 states no low-low level. Stated: "),
        (("--level", "5 m", "--to", "16 m"), "--to: V-1 reaches from 0.000 m to 15.000 m."),
        (("--level", "5 m", "--to", "brim"), "Or name a limit, as in --to high-high."),
        (("--level", "5 m", "--rate", "120"), "--rate "),
        (("--level", "5 m", "--rate", "0 m3/h"), "--rate: at no flow"),
        (("--level", "5 m", "--rate", ""), "--rate is empty."),
        (("--level", "5 m", "--rate-uncertainty", "2 m3/h"), "needs a --rate"),
        (("--level", "5 m", "--rate", "1 m3/h", "--rate-uncertainty", "-2 m3/h"), "not be below"),
        (("--level", "5 m", "--closing-time", "-5 s"), '--closing-time "-5 s": must be above zero'),
        (("--level", "5 m", "--next-reading", "0 h"), "must be above zero"),
        (("--level", "5 m", "--add", "-5000 t"), "more is taken out than there is"),
        (("--level", "5 m", "--add", "500 bar"), "--add "),
        ((), "no reading was given"),
    ],
)
def test_what_cannot_be_planned_is_bad_input(plan: Any, words: tuple[str, ...], told: str) -> None:
    code, out, err = plan(*words)
    assert (code, out) == (2, "")
    assert told in err


def test_without_limits_a_level_has_to_be_named(plan: Any) -> None:
    code, _, err = plan("--level", "5 m", tank="V-3")
    assert code == 2
    assert "states no maximum working level. Stated: none." in err
    code, out, _ = plan("--level", "5 m", "--to", "13 m", tank="V-3")
    assert code == 0
    assert "limit " not in out


def test_a_refused_reading_has_no_plan(plan: Any) -> None:
    code, out, err = plan("--level", "16 m")
    assert (code, out) == (3, "")
    assert "tankcalc: " in err


def test_a_temperature_beyond_the_model_has_no_plan(plan: Any) -> None:
    code, out, err = plan("--level", "5 m", *OIL, "--design-temperature", "300 degC")
    assert (code, out) == (3, "")
    assert "outside what the expansion density covers" in err


def test_from_the_shell(site: Path, tmp_path: Path) -> None:
    done = run(tmp_path, "--profiles", str(site), "plan", "V-1", "--level", "5 m", "--rate",
               "-120 m3/h")  # fmt: skip
    assert (done.returncode, done.stderr) == (0, "")
    assert "minimum working" in done.stdout
    help_text = run(tmp_path, "plan", "--help").stdout
    assert "--design-temperature" in help_text
