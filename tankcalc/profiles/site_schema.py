"""site.toml: the site's name, gravity and air, shifts, display units, log and live sources."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import replace

from tankcalc.constants import ICE_POINT_K
from tankcalc.errors import InputError
from tankcalc.limits.settings import AlertSettings, RateSettings
from tankcalc.profiles.crews_schema import CREWS
from tankcalc.profiles.findings import At, Findings, nearest, show
from tankcalc.profiles.leaves import UnfitError, choice, fraction, leaf, quantity, text, whole
from tankcalc.profiles.source_schema import SITE_SOURCE
from tankcalc.profiles.tables import Named, Table, Values, may
from tankcalc.surroundings import Surroundings, surroundings
from tankcalc.text import clean

STANDARD_K = ICE_POINT_K + 15.0
"""Base of standard volumes where neither the site nor the liquid's figures state one, K."""

_CLOCK = re.compile(r"([01]\d|2[0-3]):[0-5]\d")
_STORE = re.compile(r"sqlite|postgres(?:ql)?://\S+|.*[/\\].*|.*\.(?:sqlite3?|db)")


def _time_zone(value: object) -> str:
    from zoneinfo import ZoneInfo, ZoneInfoNotFoundError, available_timezones

    if not isinstance(value, str):
        raise UnfitError(
            f'a time zone in quotes is wanted, such as "Europe/Lisbon", found {show(value)}.'
        )
    try:
        ZoneInfo(value)
    except (ZoneInfoNotFoundError, ValueError, OSError):
        raise UnfitError(
            f"{show(value)} is no time zone known here.",
            _zone_advice(value, available_timezones()),
        ) from None
    return value


def _zone_advice(typed: str, zones: set[str]) -> str:
    cities = {zone.rpartition("/")[2]: zone for zone in sorted(zones)}
    near = nearest(typed, zones)
    if near is None:
        city = nearest(typed.rpartition("/")[2], cities)
        near = None if city is None else cities[city]
    if near is None:
        return 'Write one such as "Europe/Lisbon", or "UTC".'
    return f'Did you mean "{near}"?'


def _gravity(values: Values, at: At, findings: Findings) -> Values | None:
    value, latitude, height = (values[key] for key in ("value", "latitude", "height"))
    if value is not None and latitude is not None:
        findings.add(
            (*at, "latitude"), "stands beside a value.", "Give the value, or latitude and height."
        )
        return None
    if latitude is not None and height is None:
        findings.add((*at, "height"), "missing.", 'Gravity needs it too, as in height = "12 m".')
        return None
    return values


def _air(values: Values, at: At, findings: Findings) -> Values | None:
    if values["density"] is not None and values["humidity"] is not None:
        findings.add(
            (*at, "density"),
            "stands beside a humidity.",
            "Give the density, or pressure, temperature and humidity.",
        )
        return None
    return values


def _store(value: object) -> str:
    if isinstance(value, str) and clean(value) == value and _STORE.fullmatch(value):
        return value
    raise UnfitError(
        f"{show(value)} is no store.", 'Write "sqlite", the path of a file, or "postgresql://...".'
    )


class Shifts:
    """``[shifts]``: names with their local start times."""

    def read(self, value: object, at: At, findings: Findings) -> dict[str, str] | None:
        """Return the start of each shift ("HH:MM"), or None after noting what is wrong."""
        if not isinstance(value, dict):
            findings.add(at, f"a table is wanted, found {show(value)}.")
            return None
        before = len(findings)
        if not value:
            findings.add(at, "no shift is named.", 'Write at least one, as in Day = "06:00".')
        starts: dict[str, str] = {}
        for name, start in value.items():
            self._check(name, start, starts, (*at, name), findings)
            starts.setdefault(str(start), name)
        return {name: start for start, name in starts.items()} if len(findings) == before else None

    def _check(
        self, name: str, start: object, taken: dict[str, str], at: At, findings: Findings
    ) -> None:
        if not name.strip() or clean(name, 30) != name:
            findings.add(at, "this is no name for a shift.", "Use up to 30 plain characters.")
        if not isinstance(start, str) or not _CLOCK.fullmatch(start):
            findings.add(
                at, f"{show(start)} is no time of day.", 'Write hours and minutes, as in "06:00".'
            )
        elif start in taken:
            findings.add(at, f"begins at {start}, as {show(taken[start])} does.")


def _alerts(values: Values, at: At, findings: Findings) -> AlertSettings:
    usual = AlertSettings()
    names = {
        "level_dead_band": "level_dead_band",
        "pressure_dead_band": "pressure_dead_band",
        "flow_dead_band": "flow_dead_band",
        "on_delay": "on_delay_s",
        "off_delay": "off_delay_s",
        "stale_after": "stale_after_s",
        "stuck_after": "stuck_after",
    }
    given = {field: values[key] for key, field in names.items() if values[key] is not None}
    return replace(usual, **given)


ALERTS = Table(
    {
        "level_dead_band": may(fraction()),
        "pressure_dead_band": may(fraction()),
        "flow_dead_band": may(fraction()),
        "on_delay": may(quantity("time", "not negative")),
        "off_delay": may(quantity("time", "not negative")),
        "stale_after": may(quantity("time", "positive")),
        "stuck_after": may(whole(2, 1000)),
    },
    _alerts,
)


def _rates(values: Values, at: At, findings: Findings) -> RateSettings:
    share = values["random_share"]
    usual = RateSettings(read_every_s=values["read_every"])
    return usual if share is None else replace(usual, random_share=share)


RATES = Table(
    {"read_every": may(quantity("time", "positive")), "random_share": may(fraction())}, _rates
)


def check_crews(values: Values, shifts: Mapping[str, str], findings: Findings) -> None:
    """Note a roster that does not name every shift of the site, or names others."""
    roster = values["crews"]
    if roster is None:
        return
    for name in roster.crews:
        if name not in shifts:
            known = f"Shifts here: {', '.join(shifts)}."
            findings.add(("crews", "roster", name), "there is no shift of that name.", known)
    for name in shifts:
        if name not in roster.crews:
            findings.add(
                ("crews", "roster"), f"the shift {show(name)} has no crews.", "Give it a line."
            )


SITE = Table(
    {
        "name": may(text(60)),
        "place": may(text(), ""),
        "time_zone": may(leaf(_time_zone), "UTC"),
        "units": may(choice("metric", "us", "imperial"), "metric"),
        "gravity": may(
            Table(
                {
                    "value": may(quantity("acceleration", "positive")),
                    "latitude": may(quantity("angle")),
                    "height": may(quantity("length")),
                    "uncertainty": may(quantity("acceleration", "positive")),
                },
                _gravity,
            )
        ),
        "air": may(
            Table(
                {
                    "density": may(quantity("density", "not negative")),
                    "pressure": may(quantity("pressure", "positive")),
                    "temperature": may(quantity("temperature")),
                    "humidity": may(fraction()),
                    "uncertainty": may(quantity("density", "positive")),
                },
                _air,
            )
        ),
        "standard_temperature": may(quantity("temperature"), STANDARD_K),
        "shifts": may(Shifts()),
        "crews": may(CREWS),
        "alerts": may(ALERTS, AlertSettings()),
        "rates": may(RATES, RateSettings()),
        "log": may(Table({"store": may(leaf(_store))})),
        "sources": may(Named(SITE_SOURCE)),
    }
)


def read_surroundings(values: Values, findings: Findings) -> Surroundings | None:
    """Return gravity, outside air and its pressure from what a site states."""
    gravity, air = values["gravity"] or {}, values["air"] or {}
    try:
        made = surroundings(
            gravity_m_s2=gravity.get("value"),
            latitude_rad=gravity.get("latitude"),
            height_m=gravity.get("height"),
            air_density_kg_m3=air.get("density"),
            outside_pressure_pa=air.get("pressure"),
            air_temperature_k=air.get("temperature"),
            humidity=air.get("humidity"),
        )
        return replace(
            made,
            gravity_uncertainty_m_s2=gravity.get("uncertainty"),
            air_uncertainty_kg_m3=air.get("uncertainty"),
            standard_temperature_k=values["standard_temperature"],
        )
    except InputError as error:
        key, _, why = str(error).partition(": ")
        findings.add(("air",) if "air" in key else ("gravity",), why if key else str(error))
        return None
