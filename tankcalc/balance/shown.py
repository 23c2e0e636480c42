"""Balances as plain JSON data, SI; the key says the unit."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict
from typing import TYPE_CHECKING, Any

from tankcalc.balance.account import COVERAGE, Account, verdict
from tankcalc.balance.cusum import ENOUGH, Cusum
from tankcalc.shiftlog.times import iso_utc

if TYPE_CHECKING:
    from tankcalc.balance.causes import Causes
    from tankcalc.balance.contents import Contents
    from tankcalc.balance.drift import Drift
    from tankcalc.balance.periods import Period
    from tankcalc.balance.rest import Rest
    from tankcalc.balance.transfers import Repeated, Transfer


def account_data(one: Account) -> dict[str, Any]:
    """Return a balance; every figure but the shares is in the unit of its basis."""
    return {
        "opening": one.opening,
        "moved": dict(one.moved),
        "book": one.book,
        "closing": one.closing,
        "difference": one.difference,
        "standard_uncertainty": one.standard_uncertainty,
        "expanded_uncertainty": COVERAGE * one.standard_uncertainty,
        "significance": one.significance,
        "verdict": verdict(one.significance),
        "throughput": one.throughput,
        "of_throughput": one.of_throughput,
        "uncertainties": dict(one.uncertainties),
    }


def accounts_data(accounts: Mapping[str, Account]) -> dict[str, Any]:
    """Return balances by basis; null where there is none in it."""
    return {
        basis: account_data(accounts[basis]) if basis in accounts else None
        for basis in ("mass_kg", "standard_volume_m3")
    }


def reading_data(contents: Contents, wanted_us: int) -> dict[str, Any]:
    """Return a reading that opens or closes a span, and how long before the wanted time it was."""
    state = contents.state
    return {
        "id": contents.entry.id,
        "time": iso_utc(state.at_us),
        "before_s": (wanted_us - state.at_us) / 1e6,
        "level_m": state.level_m,
        **state.amounts,
    }


def period_data(period: Period) -> dict[str, Any]:
    """Return one period of a tank."""
    return {
        "opening": iso_utc(period.opening.state.at_us),
        "closing": iso_utc(period.closing.state.at_us),
        "hours": period.hours,
        "movements": len(period.movements),
        **accounts_data(period.accounts()),
    }


def cusum_data(found: Cusum | None) -> dict[str, Any] | None:
    """Return cumulative sums, null where there are none."""
    if found is None:
        return None
    return {
        "gain": list(found.gain),
        "loss": list(found.loss),
        "threshold": found.threshold,
        "alert": found.alert or None,
        "first_alert": found.first_alert,
        "periods": len(found.gain),
        "enough": found.enough,
        "periods_needed": ENOUGH,
        "scatter": found.scatter,
        "mean": found.mean,
    }


def causes_data(found: Causes | None) -> dict[str, Any] | None:
    """Return a regression, null where there is none; an infinite t is null."""
    if found is None:
        return None
    data = asdict(found)
    for slope in data["slopes"]:
        slope["t"] = slope["t"] if abs(slope["t"]) != float("inf") else None
    return data


def drift_data(found: Drift) -> dict[str, Any]:
    """Return a slope; its unit is that of what drifts, an hour."""
    return asdict(found) | {"significance": found.significance, "whole_days": found.whole_days}


def rest_data(found: Rest | None) -> dict[str, Any] | None:
    """Return the drift of a tank at rest, null where there is none."""
    if found is None:
        return None
    return {
        "from": iso_utc(found.from_us),
        "to": iso_utc(found.to_us),
        "mass_kg": drift_data(found.mass) | {"verdict": verdict(found.mass.significance)},
        "pressures_pa": {name: drift_data(one) for name, one in found.pressures.items()},
        "hints": list(found.hints),
    }


def transfer_data(one: Transfer) -> dict[str, Any]:
    """Return one transfer, in kg."""
    return asdict(one) | {
        "difference": one.difference,
        "significance": one.significance,
        "verdict": verdict(one.significance),
        "of_moved": one.of_moved,
    }


def repeated_data(source: str, target: str, found: Repeated) -> dict[str, Any]:
    """Return what many transfers have in common."""
    worth = found.significance
    return {"source": source, "target": target, **asdict(found), "significance": worth}
