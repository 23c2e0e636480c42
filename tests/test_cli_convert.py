"""``tankcalc convert`` and ``strap`` as a user meets them."""

from __future__ import annotations

import csv
import json
from pathlib import Path
from typing import Any

import pytest
from sites import make_site, run

from tankcalc.cli.main import main
from tankcalc.result import JSON_KEYS

P1 = 9.81 * (850.0 - 1.2) * 11.5


@pytest.fixture
def site(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    for name in ("TANKCALC_PROFILES", "TANKCALC_LOG"):
        monkeypatch.delenv(name, raising=False)
    return make_site(tmp_path / "site")


def call(capsys: pytest.CaptureFixture[str], *words: str) -> tuple[int, str, str]:
    """Run a command in this process: its exit code, standard output, standard error."""
    try:
        code = main(words)
    except SystemExit as left:
        code = int(str(left.code))
    out, err = capsys.readouterr()
    return code, out, err


def converted(site: Path, capsys: pytest.CaptureFixture[str], *words: str) -> dict[str, Any]:
    code, out, err = call(capsys, "--profiles", str(site), "convert", *words, "--json")
    assert (code, err) == (0, "")
    answer: dict[str, Any] = json.loads(out)
    return answer


def test_json_has_every_key_and_the_right_figures(
    site: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    answer = converted(site, capsys, "V-1", "--p1", f"{P1} Pa")
    assert set(answer) == {*JSON_KEYS, "expanded_uncertainty", "bounds", "warnings"}
    assert answer["level_m"] == pytest.approx(12.0, abs=1e-9)
    assert answer["mass_kg"] == pytest.approx(3769.911184 * 850.0, rel=1e-9)
    assert answer["status"] == "good"
    assert answer["fluid"] == "Oil"
    assert answer["standard_volume_m3"] is None


@pytest.mark.parametrize(
    "p1",
    [
        "95.757372 kPa",
        "0.95757372 bar",
        "957.57372 mbar",
        "13.8884326 psi",
        "13.5757372 mA",
        "59.8483575 %",
    ],
)
def test_the_same_pressure_in_any_unit(
    site: Path, capsys: pytest.CaptureFixture[str], p1: str
) -> None:
    # 95.757372 kPa is the pressure of 11.5 m of this oil under air.
    answer = converted(site, capsys, "V-1", "--p1", p1)
    assert answer["level_m"] == pytest.approx(12.0, abs=1e-6)


def test_the_text_report_in_us_units(site: Path, capsys: pytest.CaptureFixture[str]) -> None:
    words = ("--profiles", str(site), "--units", "us", "convert", "V-1", "--level", "12 m")
    code, out, _ = call(capsys, *words)
    assert code == 0
    assert "V-1, Oil: GOOD" in out
    assert "39 ft 4 7/16 in" in out
    assert "Not a safety function" in out


def test_site_options_are_taken_before_and_after_the_command(
    site: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    before = call(capsys, "--profiles", str(site), "convert", "V-1", "--level", "5 m")
    after = call(capsys, "convert", "V-1", "--level", "5 m", "--profiles", str(site))
    assert before == after


def test_a_negative_reading_needs_no_trick(site: Path, capsys: pytest.CaptureFixture[str]) -> None:
    words = ("--profiles", str(site), "convert", "V-3", "--p3", "-0.2kPa", "--level", "5 m")
    assert call(capsys, *words)[0] == 0


@pytest.mark.parametrize(
    ("words", "code", "says"),
    [
        (("V-1", "--p1", "98.2"), 2, "--p1"),
        (("V-1",), 2, "no reading was given"),
        (("V-1", "--p1", "4.2 bar"), 3, "above what a full V-1 can show"),
        (("V-1", "--p1", "-1 kPa"), 3, "below 0.500 m"),
        (("V-3", "--p1", "90 kPa"), 3, "Give p3, or a dip"),
        (("V-9", "--level", "5 m"), 2, "V-9"),
        (("V-1", "--level", "5 m", "--fluid", "oli"), 2, "oil"),
        (("V-1", "--density", "850 kg/m3"), 3, "Nothing was given that fixes the surface"),
        (("../../etc/passwd", "--level", "5 m"), 2, ""),
        (("V-1", "--colour", "red"), 2, "unrecognized arguments"),
        (("V-1", "--lev", "5 m"), 2, "unrecognized arguments"),
        (("V-1", "--level", "5 m", "--level", "6 m"), 2, "given twice"),
        (("V-1", "--temperature", "400 m: 9 degC, 2 m: 9 degC", "--level", "5 m"), 2, "reaches"),
        (("V-1", "--level", "5 m", "--density", "0.845 kg/m3"), 2, "no liquid that is stored"),
    ],
)
def test_refusals_say_why_and_leave_with_their_code(
    site: Path,
    capsys: pytest.CaptureFixture[str],
    words: tuple[str, ...],
    code: int,
    says: str,
) -> None:
    found, out, err = call(capsys, "--profiles", str(site), "convert", *words)
    assert found == code
    assert says in out + err
    assert "Traceback" not in out + err


def test_a_refused_answer_in_json_has_null_figures_and_its_reason(
    site: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    words = ("--profiles", str(site), "convert", "V-1", "--p1", "4.2 bar", "--json")
    code, out, err = call(capsys, *words)
    answer = json.loads(out)
    assert code == 3
    assert answer["status"] == "refused"
    assert answer["level_m"] is None
    assert answer["warnings"][0]["code"] == "above_top"
    assert "above what a full" in err


def test_the_demo_site_says_that_it_is_one(tmp_path: Path) -> None:
    done = run(tmp_path, "convert", "T-101", "--level", "5 m")
    assert done.returncode == 0
    assert "Demo site" in done.stderr


def test_a_missing_site_is_a_message(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    code, _, err = call(capsys, "--profiles", str(tmp_path / "none"), "convert", "V-1")
    assert code == 2
    assert "none" in err


def test_strap_prints_a_table_that_ends_where_the_tank_does(
    site: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    code, out, _ = call(capsys, "--profiles", str(site), "strap", "V-1", "--step", "40 cm")
    assert code == 0
    rows = list(csv.reader(out.splitlines()))
    assert rows[0] == ["level [m]", "volume [m3]", "area [m2]"]
    assert rows[1] == ["0.0000", "0.000000", "314.159265"]
    assert rows[2][0] == "0.4000"
    assert rows[-1] == ["15.0000", "4712.388980", "314.159265"]


@pytest.mark.parametrize("step", ["0 m", "-1 cm", "1e-9 m", "5 kPa"])
def test_strap_refuses_steps_that_make_no_table(
    site: Path, capsys: pytest.CaptureFixture[str], step: str
) -> None:
    assert call(capsys, "--profiles", str(site), "strap", "V-1", "--step", step)[0] == 2


def test_a_closed_pipe_is_no_drama(site: Path, tmp_path: Path) -> None:
    import subprocess
    import sys

    command = f"{sys.executable} -m tankcalc --profiles {site} strap V-1 --step '1 mm' | head -n 1"
    done = subprocess.run(["sh", "-c", command], capture_output=True, text=True, check=False)
    assert done.stdout.startswith("level [m]")
    assert done.stderr == ""


def test_help_and_version(capsys: pytest.CaptureFixture[str]) -> None:
    assert call(capsys, "--version")[1].startswith("tankcalc ")
    for words in (("--help",), ("convert", "--help"), ("strap", "--help")):
        code, out, _ = call(capsys, *words)
        assert code == 0
        assert "usage: tankcalc" in out


def test_a_unit_slip_is_named_among_the_faults_that_would_reconcile(
    site: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    words = ("--profiles", str(site), "convert", "V-1", "--p1", "13.888 bar", "--level", "12 m")
    code, out, _ = call(capsys, *words)
    assert code == 3
    assert "p1 was typed in bar but is in psi: then 12.000 m" in out
    assert out.count("was typed in") == 1
    code, out, _ = call(capsys, *words, "--json")
    (first, *_) = json.loads(out)["explanations"]
    assert (first["code"], first["reading"]) == ("unit", "p1")
    assert first["level_m"] == pytest.approx(12.0, abs=1e-3)


def test_budget_and_terms_are_readable_tables(
    site: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    words = ("--profiles", str(site), "convert", "V-1", "--p1", f"{P1} Pa", "--budget", "--terms")
    code, out, _ = call(capsys, *words)
    assert code == 0
    for wanted in ("+/-", "Input, k = 1", "density *", "expanded, k = 2", "Left out"):
        assert wanted in out
    assert max(len(line) for line in out.splitlines()) <= 80
