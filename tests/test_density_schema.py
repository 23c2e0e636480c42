"""The tables of a fluid file: every model's keys, what is made of them, what is refused."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from tankcalc.errors import ProfileError
from tankcalc.fluids.constituents import Constituents
from tankcalc.fluids.ethanol import Ethanol
from tankcalc.fluids.liquefied_gas import LiquefiedGas
from tankcalc.fluids.petroleum import GROUPS, Petroleum
from tankcalc.fluids.saturated import Saturated
from tankcalc.fluids.solution import Grid, Solution
from tankcalc.fluids.vapour import Vapour
from tankcalc.fluids.water import Water
from tankcalc.profiles import Site, load_site
from tankcalc.profiles.where import demo_folder

GRID = """\
model = "solution"
concentration = "15 %"
grid_source = "Supplier's data sheet"
grid_date = "2026-03-01"

[density.grid]
concentrations = [0.1, "20 %"]
temperatures = ["0 degC", "20 degC", "40 degC"]
densities = [
  ["1075 kg/m3", "1070 kg/m3", "1062 kg/m3"],
  ["1156 kg/m3", "1148 kg/m3", "1138 kg/m3"],
]
"""


@pytest.fixture
def site(tmp_path: Path) -> Site:
    (tmp_path / "site.toml").write_text('name = "Somewhere"\n')
    (tmp_path / "fluids").mkdir()
    (tmp_path / "tanks").mkdir()
    return load_site(tmp_path)


def read(site: Site, density: str) -> object:
    """The model that a [density] table makes."""
    (site.folder / "fluids" / "x.toml").write_text(f"[density]\n{density}\n")
    (layer,) = site.fluid("x").layers
    return layer.model


def refused(site: Site, density: str) -> list[str]:
    with pytest.raises(ProfileError) as error:
        read(site, density)
    return [str(problem).removeprefix("fluids/x.toml:") for problem in error.value.problems]


def test_salt_makes_water_of_the_sea(site: Site) -> None:
    assert read(site, 'model = "water"') == Water()
    assert read(site, 'model = "water"\nsalinity = 0.035') == Water(0.035)
    assert read(site, 'model = "water"\nsalinity = "3.5 %"') == Water(0.035)
    (said,) = refused(site, 'model = "water"\nsalinity = "35 %"')
    assert said.startswith("1: density: a salinity must be between 0 and 0.042 (42 g/kg)")


def test_ethanol_takes_a_mass_fraction(site: Site) -> None:
    assert read(site, 'model = "ethanol"\nmass_fraction = "40 %"') == Ethanol(0.4)
    assert refused(site, 'model = "ethanol"\nmass_fraction = 40') == [
        "3: density.mass_fraction: 40 is not between 0 and 1."
    ]
    assert refused(site, 'model = "ethanol"') == ["1: density.mass_fraction: missing."]


def test_petroleum_takes_its_group_reference_and_edition(site: Site) -> None:
    text = 'model = "petroleum"\ngroup = "fuel oil"\nreference = "845 kg/m3"\nat = "15 degC"\n'
    assert read(site, text) == Petroleum("fuel oil", 845.0, 288.15, 2004, None)
    assert read(site, text + "edition = 1980") == Petroleum("fuel oil", 845.0, 288.15, 1980, None)
    special = text.replace("fuel oil", "special") + 'expansion = "9e-4 / K"'
    assert read(site, special) == Petroleum("special", 845.0, 288.15, 2004, 9e-4)


def test_every_group_of_petroleum_can_be_named(site: Site) -> None:
    inside = {"gasoline": 740.0, "transition": 780.0, "jet fuel": 800.0, "fuel oil": 900.0}
    for group in GROUPS:
        text = (
            f'model = "petroleum"\ngroup = "{group}"\nat = "15 degC"\n'
            f'reference = "{inside.get(group, 870.0)} kg/m3"\n'
        )
        model = read(site, text + ('expansion = "9e-4 / K"' if group == "special" else ""))
        assert isinstance(model, Petroleum)
        assert model.group == group


@pytest.mark.parametrize(
    ("line", "said"),
    [
        ('group = "diesel"', "is not among the choices"),
        (
            "edition = 1995",
            "6: density.edition: 1995 is no edition known here. Choose 2004 or 1980.",
        ),
        ('edition = "2004"', '"2004" is no edition known here'),
        ('group = "special"', "density.group: a special liquid needs"),
        ('at = "17 degC"', "density.at: "),
        ('reference = "1845 kg/m3"', "density.reference: 1845 kg/m3 at 15 degC is outside"),
        ('expansion = "-9e-4 / K"', "must be above zero"),
    ],
)
def test_petroleum_that_is_none_is_refused(site: Site, line: str, said: str) -> None:
    lines = {
        "model": 'model = "petroleum"',
        "group": 'group = "crude"',
        "reference": 'reference = "845 kg/m3"',
        "at": 'at = "15 degC"',
    } | {line.split(" ")[0]: line}
    (problem,) = refused(site, "\n".join(lines.values()))
    assert said in problem


def test_a_grid_keeps_whose_figures_it_holds(site: Site) -> None:
    model = read(site, GRID)
    assert isinstance(model, Solution)
    assert model.source == "Supplier's data sheet, 2026-03-01"
    assert model.grid == Grid(
        (0.1, 0.2),
        (273.15, 293.15, 313.15),
        ((1075.0, 1070.0, 1062.0), (1156.0, 1148.0, 1138.0)),
        "Supplier's data sheet",
        "2026-03-01",
    )
    assert model.checked_density(np.array(293.15)) == pytest.approx(1109.0)


@pytest.mark.parametrize(
    ("change", "said"),
    [
        (('"20 %"]', "0.05]"), "density.grid.concentrations.2: does not rise from the one"),
        (('"40 degC"]', '"20 degC"]'), "density.grid.temperatures.3: does not rise from the"),
        ((', "1138 kg/m3"]', "]"), "density.grid.densities.2: 2 densities for 3 temperatures."),
        (('0.1, "20 %"]', '0.1, "20 %", "30 %"]'), "density.grid.densities: 2 rows of dens"),
        (('"1138 kg/m3"', "1138"), "density.grid.densities.2.3: 1138 is a bare number."),
        (('"15 %"', '"25 %"'), "density: a concentration of 25 % is outside the grid's, 10 to"),
        (('grid_date = "2026-03-01"\n', ""), "density.grid_date: missing."),
        (('"2026-03-01"', '"March"'), 'density.grid_date: "March" is no date.'),
        (("concentrations =", "concentration ="), "density.grid.concentration: unknown key."),
    ],
)
def test_a_grid_that_does_not_fit_is_told_where(
    site: Site, change: tuple[str, str], said: str
) -> None:
    (problem,) = refused(site, GRID.replace(*change, 1))
    assert problem.split(": ", 1)[1].startswith(said)


def composition(inside: str, more: str = "") -> str:
    return f'model = "liquefied gas"\ncomposition = {{ {inside} }}\n{more}'


def test_the_composition_chooses_the_method(site: Site) -> None:
    lng = composition("methane = 0.92, ethane = '8 %'")
    pairs = (("methane", 0.92), ("ethane", 0.08))
    assert read(site, lng) == LiquefiedGas(pairs)
    assert read(site, lng + 'method = "saturated"') == Saturated(pairs)
    assert read(site, composition("ammonia = 1")) == Saturated((("ammonia", 1.0),))
    lpg = read(site, composition("propane = 0.6, butane = 0.4"))
    assert lpg == Saturated((("propane", 0.6), ("n-butane", 0.4)))


@pytest.mark.parametrize(
    ("text", "said"),
    [
        (
            composition("methane = 0.92, ethane = 0.07"),
            "3: density.composition: the mole fractions sum to 0.99, not to 1.",
        ),
        (
            composition("methane = 0.92, ethan = 0.08"),
            '3: density.composition: "ethan" is no component known here. Did you mean "ethane"?',
        ),
        (
            composition('methane = 0.92, ethane = "8 m"'),
            '3: density.composition: "ethane": "8 m":',
        ),
        (
            composition("methane = true"),
            '3: density.composition: "methane" wants a fraction, such as 0.92, found true.',
        ),
        (composition(""), "3: density.composition: a table of names and fractions is wanted"),
        (
            composition("propane = 1", 'method = "revised Klosek-McKinley"'),
            "1: density: the revised Klosek-McKinley method takes at least 60 % methane",
        ),
        (
            composition("methane = 0.95, nitrogen = 0.05"),
            "1: density: the revised Klosek-McKinley method takes at most 4 % nitrogen",
        ),
        (composition("ammonia = 1", 'method = "boiling"'), '4: density.method: "boiling" is not'),
    ],
)
def test_a_composition_that_cannot_be_used_is_told(site: Site, text: str, said: str) -> None:
    (problem,) = refused(site, text)
    assert problem.startswith(said)


def test_a_saturated_gas_brings_its_own_vapour_unless_the_file_states_one(site: Site) -> None:
    path = site.folder / "fluids" / "x.toml"
    text = f"[density]\n{composition('propane = 1')}"
    path.write_text(text)
    vapour = site.fluid("x").vapour
    assert vapour is not None
    assert vapour.molar_mass_kg_mol == pytest.approx(44.0956e-3, rel=1e-5)
    path.write_text(text + '\n[vapour]\ndensity = "9 kg/m3"\n')
    assert site.fluid("x").vapour == Vapour(9.0)
    path.write_text(f"[density]\n{composition('methane = 1')}")
    assert site.fluid("x").vapour is None, "the method for natural gas knows none"


def test_constituents_take_mass_fractions(site: Site) -> None:
    text = 'model = "constituents"\nmass_fractions = { water = 0.9, fat = 0.1 }'
    assert read(site, text) == Constituents((("water", 0.9), ("fat", 0.1)))
    assert refused(site, text.replace("0.1 }", "0.2 }")) == [
        "3: density.mass_fractions: the mass fractions sum to 1.1, not to 1."
    ]


def test_a_model_not_known_is_refused_with_the_nearest(site: Site) -> None:
    assert refused(site, 'model = "etanol"') == [
        '2: density.model: "etanol" is no model known here. Did you mean "ethanol"?'
    ]


@pytest.mark.parametrize(
    ("fluid", "t_k", "low", "high"),
    [
        ("lng", 112.0, 440.0, 460.0),
        ("ethanol-96", 293.15, 806.0, 809.0),
        ("sea-water", 288.15, 1025.0, 1027.0),
        ("whole-milk", 278.15, 1020.0, 1035.0),
        ("glycol-45", 293.15, 1055.0, 1062.0),
    ],
)
def test_the_demo_liquids_weigh_what_they_should(
    fluid: str, t_k: float, low: float, high: float
) -> None:
    (layer,) = load_site(demo_folder(), is_demo=True).fluid(fluid).layers
    assert low < float(layer.model.checked_density(np.array(t_k))) < high


def test_reading_a_plain_liquid_loads_no_library_of_another() -> None:
    probe = (
        "from tankcalc.profiles import find_site, load_site\n"
        "load_site(find_site()[0]).fluid('sea-water').layers[0].model\n"
        "import sys\nprint(*sys.modules)"
    )
    done = subprocess.run([sys.executable, "-c", probe], capture_output=True, text=True, check=True)
    loaded = set(done.stdout.split())
    assert not {"CoolProp", "scipy", "difflib", "tankcalc.fluids.petroleum"} & loaded
