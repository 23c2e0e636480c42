"""Unit words that mean different things to different people: refused, with what to type instead.

Keys are spelled without case, blanks and points, so that "in w.c.", "in WC" and "inwc" are one.
"""

from __future__ import annotations

from typing import Final

_TON = ("A ton is 1000 kg, 2240 lb or 2000 lb.", 'Type "t", "long ton" or "short ton".')
_GALLON = ("A US and an imperial gallon differ by a fifth.", 'Type "US gal" or "imp gal".')
_BARREL = (
    "Barrels of oil, beer and other goods differ.",
    'Type "oil bbl" for 42 US gallons, or another unit of volume.',
)
_WATER = (
    "A column of water means a pressure only with the water's temperature.",
    'Type "inH2O@4degC", "inH2O@60degF" or "inH2O@68degF", as the transmitter is set.',
)
_FEET_OF_WATER = (
    _WATER[0],
    'Type "ftH2O@4degC", "ftH2O@60degF" or "ftH2O@68degF", as the transmitter is set.',
)
_GRAVITY = (
    "A relative density needs the temperatures of the liquid and of the water.",
    'Type the density itself, such as "845 kg/m3".',
)
_DIFFERENTIAL = (
    "A differential pressure takes no letter.",
    'Type the unit alone, such as "psi" or "kPa", for the differential transmitter.',
)

AMBIGUOUS: Final[dict[str, tuple[str, str]]] = {
    **dict.fromkeys(("ton", "tons", "tn", "mt"), _TON),
    **dict.fromkeys(
        ("ton/h", "tons/h", "ton/hr", "tons/hr", "tph", "ton/d", "tons/day"),
        (_TON[0], 'Type "t/h", or "lb/h".'),
    ),
    **dict.fromkeys(("gal", "gals", "gallon", "gallons", "galls"), _GALLON),
    **dict.fromkeys(
        ("gpm", "gal/min", "gals/min"), (_GALLON[0], 'Type "US gal/min" or "imp gal/min".')
    ),
    **dict.fromkeys(
        ("lb/gal", "lbs/gal", "ppg"), (_GALLON[0], 'Type "lb/US gal" or "lb/imp gal".')
    ),
    **dict.fromkeys(
        ("bbl", "bbls", "bl", "barrel", "barrels", "bbl(us)", "usbbl", "usbarrel"), _BARREL
    ),
    **dict.fromkeys(
        ("bbl/h", "bbl/hr", "bph", "bbl/d", "bbl/day", "bpd"),
        (_BARREL[0], 'Type "oil bbl/h" or "oil bbl/d".'),
    ),
    **dict.fromkeys(
        ("inh2o", "inchh2o", "incheswater", "inchesofwater", "inchofwater", "inw"), _WATER
    ),
    **dict.fromkeys(("inwc", "inwg", "inchwc", "incheswc", "iwc", '"wc', '"wg', '"h2o'), _WATER),
    **dict.fromkeys(("fth2o", "ftwc", "ftwg", "feetofwater", "footofwater"), _FEET_OF_WATER),
    **dict.fromkeys(("sg", "rd", "api", "degapi"), _GRAVITY),
    **dict.fromkeys(("psid", "bard", "mbard", "kpad", "bar(d)", "mbar(d)"), _DIFFERENTIAL),
    **dict.fromkeys(("kpa(d)", "psi(d)", "pa(d)"), _DIFFERENTIAL),
    **dict.fromkeys(
        ("pint", "pints", "quart", "quarts", "ounce", "ounces", "oz", "floz", "fluid_ounce"),
        (
            "There are US and imperial ones, and some are masses.",
            'Type another unit, such as "L", "US gal" or "lb".',
        ),
    ),
    **dict.fromkeys(
        ("hundredweight", "hundredweights", "cwt"),
        ("A hundredweight is 112 lb or 100 lb.", 'Type "lb" or "kg".'),
    ),
}
"""By the bare word: what is wrong with it, and what to type."""
