"""Results as text."""

from __future__ import annotations

from tanks import single, stacked, upright

from tankcalc.gauging import evaluate
from tankcalc.readings import Readings
from tankcalc.report import rows, text_report


def labels(system: str = "metric") -> dict[str, str]:
    found = evaluate(upright(), single(850.0), Readings(level_m=12.0))
    return {row.label: row.value for row in rows(found, system)}  # type: ignore[arg-type]


def test_every_figure_carries_its_unit() -> None:
    assert labels()["level"] == "12.000 m"
    assert labels()["volume"] == "3769.91 m3"
    assert labels()["mass"] == "3204.425 t"
    assert labels()["p1 should read"] == "95.757 kPa"


def test_the_same_answer_in_other_units() -> None:
    assert labels("us")["level"] == "39 ft 4 7/16 in"
    assert labels("us")["p1 should read"].endswith(" psi")
    assert labels("imperial")["volume"].endswith(" imp gal")


def test_the_split_into_water_and_product_appears_only_with_water() -> None:
    assert not any("product" in label for label in labels() if label != "product in air")
    found = evaluate(upright(), stacked((1000.0, 0.5), (850.0, None)),
                     Readings(level_m=5.0, water_level_m=0.5))  # fmt: skip
    keys = [row.key for row in rows(found, "metric")]
    assert "water_volume_m3" in keys
    assert "product_mass_kg" in keys


def test_the_text_report_carries_status_basis_reasons_and_caution() -> None:
    refused = text_report(evaluate(upright(), single(850.0), Readings(p1_pa=9e5)), "metric")
    assert "V-1, liquid: REFUSED" in refused
    assert "REFUSED: p1 = 900.000 kPa is above" in refused
    assert "Basis: p1 fixes the surface" in refused
    assert refused.endswith("licensed practice decide.")
    assert max(len(line) for line in refused.splitlines()) < 80
    assert "Not a safety function" in refused
