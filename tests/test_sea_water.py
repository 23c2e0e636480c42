"""Sea water by TEOS-10, against published values and the gsw library."""

from __future__ import annotations

import math

import gsw
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from published import Published, published

from tankcalc.errors import InputError, RangeError
from tankcalc.fluids.sea_water import conservative_temperature, freezing_c, specific_volume
from tankcalc.fluids.water import Water


def rho(water: Water, t_c: float) -> float:
    return float(water.checked_density(np.array(t_c + 273.15)))


@pytest.mark.parametrize("row", published("sea_water.csv"), ids=str)
def test_published_sea_water(row: Published) -> None:
    salinity, t, p = (np.array(row.inputs[key]) for key in ("SA_g_kg", "CT_C", "p_dbar"))
    row.agrees(1.0 / float(specific_volume(salinity, t, p)))


@given(st.floats(0.0, 42.0), st.floats(-2.0, 40.0), st.floats(0.0, 8000.0))
def test_sea_water_is_that_of_the_gsw_library(salinity: float, t: float, p: float) -> None:
    s = np.array(salinity)
    conservative = conservative_temperature(s, np.array(t))
    assert conservative == pytest.approx(gsw.CT_from_pt(salinity, t), abs=1e-11)
    found = 1.0 / specific_volume(s, conservative, np.array(p))
    assert found == pytest.approx(gsw.rho(salinity, gsw.CT_from_pt(salinity, t), p), rel=1e-13)


@given(st.floats(0.0005, 0.042), st.floats(0.0, 40.0))
def test_the_sea_water_model_is_that_of_gsw_at_the_surface(salinity: float, t: float) -> None:
    wanted = gsw.rho_t_exact(1000.0 * salinity, t, 0.0)
    assert rho(Water(salinity), t) == pytest.approx(wanted, abs=0.004)


@pytest.mark.parametrize("salinity", [1.0, 10.0, 35.165, 42.0])
def test_sea_water_freezes_where_gsw_says(salinity: float) -> None:
    assert freezing_c(salinity) == pytest.approx(gsw.t_freezing(salinity, 0.0, 0.0), abs=0.01)


def test_a_trace_of_salt_weighs_next_to_nothing() -> None:
    assert rho(Water(1e-9), 15.0) == pytest.approx(rho(Water(), 15.0), abs=0.003)
    assert Water().source != Water(0.03).source


@pytest.mark.parametrize("t_c", [-1.95, 40.01, math.nan])
def test_sea_water_refuses_temperatures_it_does_not_cover(t_c: float) -> None:
    with pytest.raises(RangeError, match=r"water density covers \(-1\.9\d to 40\.00 degC\)"):
        rho(Water(0.035), t_c)


@pytest.mark.parametrize("salinity", [-1e-9, 0.0421, 35.0, math.nan])
def test_no_other_salinity_is_sea_water(salinity: float) -> None:
    with pytest.raises(InputError, match="42 g/kg"):
        Water(salinity)
