"""Components of gases: their names, their molar masses, and fractions that make a whole."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping
from typing import NamedTuple

from tankcalc.errors import InputError
from tankcalc.text import clean

CLOSE = 1e-6
"""How near to 1 fractions must sum: laboratories print at least six digits after balancing."""


class Component(NamedTuple):
    """What one component is called in the library of reference equations, and its molar mass.

    ``molar_mass_kg_mol`` is given for those that the revised Klosek-McKinley method knows.
    """

    library: str
    molar_mass_kg_mol: float | None = None


# Molar masses: IUPAC atomic weights, C 12.0107, H 1.00794, N 14.0067.
COMPONENTS: dict[str, Component] = {
    "methane": Component("Methane", 16.0425e-3),
    "ethane": Component("Ethane", 30.069e-3),
    "propane": Component("n-Propane", 44.0956e-3),
    "n-butane": Component("n-Butane", 58.1222e-3),
    "isobutane": Component("IsoButane", 58.1222e-3),
    "n-pentane": Component("n-Pentane", 72.1488e-3),
    "isopentane": Component("Isopentane", 72.1488e-3),
    "nitrogen": Component("Nitrogen", 28.0134e-3),
    "ammonia": Component("Ammonia"),
    "argon": Component("Argon"),
    "1-butene": Component("1-Butene"),
    "cis-2-butene": Component("cis-2-Butene"),
    "trans-2-butene": Component("trans-2-Butene"),
    "isobutene": Component("IsoButene"),
    "carbon dioxide": Component("CarbonDioxide"),
    "chlorine": Component("Chlorine"),
    "cyclopropane": Component("CycloPropane"),
    "dimethyl ether": Component("DimethylEther"),
    "ethylene": Component("Ethylene"),
    "ethylene oxide": Component("EthyleneOxide"),
    "n-hexane": Component("n-Hexane"),
    "hydrogen": Component("ParaHydrogen"),
    "hydrogen chloride": Component("HydrogenChloride"),
    "hydrogen sulphide": Component("HydrogenSulfide"),
    "methyl chloride": Component("R40"),
    "neopentane": Component("Neopentane"),
    "nitrous oxide": Component("NitrousOxide"),
    "oxygen": Component("Oxygen"),
    "propylene": Component("Propylene"),
    "propyne": Component("Propyne"),
    "R134a": Component("R134a"),
    "R22": Component("R22"),
    "R32": Component("R32"),
    "sulphur dioxide": Component("SulfurDioxide"),
    "vinyl chloride": Component("VinylChloride"),
}

_OTHERWISE = {
    "butane": "n-butane",
    "i-butane": "isobutane",
    "iso-butane": "isobutane",
    "pentane": "n-pentane",
    "i-pentane": "isopentane",
    "iso-pentane": "isopentane",
    "hexane": "n-hexane",
    "ethene": "ethylene",
    "propene": "propylene",
    "isobutylene": "isobutene",
    "but-1-ene": "1-butene",
    "hydrogen sulfide": "hydrogen sulphide",
    "sulfur dioxide": "sulphur dioxide",
    "chloromethane": "methyl chloride",
    "r134a": "R134a",
    "r22": "R22",
    "r32": "R32",
}


def component(name: str) -> str:
    """Return the name under which a component is kept here.

    Raises
    ------
    InputError
        No component of that name is known.
    """
    word = " ".join(name.lower().replace("_", " ").split())
    word = _OTHERWISE.get(word, word)
    if word in COMPONENTS:
        return word
    import difflib

    near = difflib.get_close_matches(word, [*COMPONENTS, *_OTHERWISE], 1)
    advice = f'Did you mean "{near[0]}"?' if near else f"Known here: {', '.join(COMPONENTS)}."
    raise InputError(f'"{clean(name, 40)}" is no component known here. {advice}')


def composition(fractions: Mapping[str, float]) -> tuple[tuple[str, float], ...]:
    """Return the components with their mole fractions, checked.

    Raises
    ------
    InputError
        A component that is not known or is there twice, or fractions that make no whole.
    """
    found: dict[str, float] = {}
    for name, share in fractions.items():
        known = component(name)
        if known in found:
            raise InputError(f"{known} is there twice, once under another name.")
        found[known] = share
    pairs = tuple((name, share) for name, share in found.items() if share != 0.0)
    whole(pairs, "mole fractions")
    return pairs


def whole(pairs: Iterable[tuple[str, float]], what: str) -> None:
    """Refuse fractions that are not between 0 and 1 or do not sum to 1.

    Raises
    ------
    InputError
        Telling the fraction, or the sum.
    """
    total = 0.0
    for name, share in pairs:
        if not 0.0 <= share <= 1.0:
            raise InputError(f"the fraction of {name} must be between 0 and 1.")
        total += share
    if not math.isclose(total, 1.0, abs_tol=CLOSE, rel_tol=0.0):
        raise InputError(f"the {what} sum to {total:.7g}, not to 1.")
