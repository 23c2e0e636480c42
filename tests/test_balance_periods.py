"""Cumulative sums, causes and drift: run lengths, references, and honest standard errors."""

from __future__ import annotations

import itertools
import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from tankcalc.balance.causes import coverage, regress
from tankcalc.balance.cusum import ENOUGH, cusum
from tankcalc.balance.drift import drift, effective_number, line, slope_error, white_error
from tankcalc.balance.lines import cusum_lines

# Cumulative sums


def run_length(threshold: float, shift: float, allowance: float = 0.5) -> float:
    """Average run length of a one-sided sum from zero, by its integral equation.

    L(s) = 1 + L(0) F(k - s) + integral_0^h L(x) f(x + k - s) dx, by Gauss-Legendre points.
    """
    x, w = np.polynomial.legendre.leggauss(80)
    x, w = threshold * (x + 1.0) / 2.0, threshold * w / 2.0
    start = np.concatenate(([0.0], x))
    away = x[None, :] + allowance - shift - start[:, None]
    kernel = np.exp(-(away**2) / 2.0) / math.sqrt(2.0 * math.pi) * w[None, :]
    below = allowance - shift - start
    to_zero = np.array([0.5 * math.erfc(-value / math.sqrt(2.0)) for value in below])
    matrix = np.eye(len(start)) - np.column_stack((to_zero, kernel))
    return float(np.linalg.solve(matrix, np.ones(len(start)))[0])


def simulated(threshold: float, shift: float, runs: int, seed: int) -> tuple[float, float]:
    """Average run length of our sums and its standard error, by simulation."""
    rng = np.random.default_rng(seed)
    lengths = []
    for _ in range(runs):
        z = rng.standard_normal(60) + shift
        while (first := cusum(z.tolist(), threshold=threshold).first_alert) is None:
            z = np.concatenate((z, rng.standard_normal(len(z)) + shift))
        lengths.append(first + 1)
    return float(np.mean(lengths)), float(np.std(lengths)) / math.sqrt(runs)


@pytest.mark.parametrize(("threshold", "published"), [(4.0, 167.7), (5.0, 465.4)])
def test_run_lengths_in_control_are_those_published(threshold: float, published: float) -> None:
    # Two-sided from zero: the rates of the two one-sided sums add.
    assert run_length(threshold, 0.0) / 2.0 == pytest.approx(published, abs=0.06)
    mean, error = simulated(threshold, 0.0, 300, 8)
    assert mean == pytest.approx(published, abs=4.0 * error)


@pytest.mark.parametrize(("threshold", "published"), [(4.0, 8.4), (5.0, 10.4)])
def test_a_shift_of_one_sigma_is_found_as_fast_as_published(
    threshold: float, published: float
) -> None:
    assert run_length(threshold, 1.0) == pytest.approx(published, abs=0.06)
    mean, error = simulated(threshold, 1.0, 2000, 9)
    assert mean == pytest.approx(published, abs=0.05 + 4.0 * error)


def test_a_small_loss_that_goes_on_is_found_where_no_period_is_significant() -> None:
    found = cusum([-1.2] * 12)
    assert found.first_alert == 7
    assert found.alert == "loss"
    assert max(found.gain) == 0.0


@given(st.lists(st.floats(-5.0, 5.0), min_size=1, max_size=40))
def test_gains_and_losses_are_mirror_images(z: list[float]) -> None:
    one, other = cusum(z), cusum([-value for value in z])
    assert one.gain == other.loss
    assert one.loss == other.gain
    assert one.first_alert == other.first_alert


def test_few_periods_say_nothing_of_the_uncertainty() -> None:
    assert cusum([1.0] * (ENOUGH - 1)).scatter is None
    assert not cusum([1.0] * (ENOUGH - 1)).enough
    # Sum of squares 4 n about a mean of zero, over n - 1.
    expected = (4.0 * ENOUGH / (ENOUGH - 1)) ** 0.5
    assert cusum([2.0, -2.0] * (ENOUGH // 2)).scatter == pytest.approx(expected)
    assert cusum([]).alert == ""


def test_a_steady_loss_is_a_mean_and_no_scatter() -> None:
    found = cusum([-1.4, -0.8] * (ENOUGH // 2))
    assert found.mean == pytest.approx(-1.1)
    assert found.scatter == pytest.approx(0.3 * (ENOUGH / (ENOUGH - 1)) ** 0.5)
    text = " ".join(" ".join(cusum_lines(found)).split())
    assert "mean -1.10, scatter about it 0.31 of the stated uncertainty" in text


# Causes


def samples(n: int, seed: int) -> dict[str, list[float]]:
    rng = np.random.default_rng(seed)
    return {
        "hours": rng.uniform(20.0, 28.0, n).tolist(),
        "throughput": rng.uniform(0.0, 1e6, n).tolist(),
        "table shape": rng.uniform(-3.0, 3.0, n).tolist(),
    }


def test_the_regression_is_that_of_a_reference() -> None:
    from scipy import stats

    causes = samples(30, 3)
    table = np.column_stack(list(causes.values()))
    rng = np.random.default_rng(4)
    d = table @ [-8.0, -2e-4, 35.0] + 60.0 * rng.standard_normal(30)
    found = regress(d.tolist(), causes)
    assert found is not None
    # An independent way: lstsq and the inverse of the normal matrix.
    slopes, rest, *_ = np.linalg.lstsq(table, d, rcond=None)
    errors = np.sqrt(rest[0] / 27 * np.diag(np.linalg.inv(table.T @ table)))
    assert [s.value for s in found.slopes] == pytest.approx(slopes.tolist(), rel=1e-9)
    assert [s.standard_error for s in found.slopes] == pytest.approx(errors.tolist(), rel=1e-9)
    assert found.freedom == 27
    for slope in found.slopes:
        assert slope.t == pytest.approx(slope.value / slope.standard_error)
        assert slope.probability == pytest.approx(2.0 * stats.t.sf(abs(slope.t), 27))


def test_slope_and_error_of_a_line_are_those_of_a_reference() -> None:
    from scipy import stats

    rng = np.random.default_rng(5)
    t = np.sort(rng.uniform(0.0, 12.0, 25))
    y = 3.0 - 0.4 * t + rng.standard_normal(25)
    reference = stats.linregress(t, y)
    slope, error, _ = line(t, y)
    assert slope == pytest.approx(reference.slope, rel=1e-9)
    assert error == pytest.approx(reference.stderr, rel=1e-9)


def test_each_cause_shows_in_its_own_slope() -> None:
    causes = samples(40, 7)
    noise = np.random.default_rng(8).standard_normal(40) * 20.0
    for name, size in (("hours", -10.0), ("throughput", 2e-4), ("table shape", -60.0)):
        found = regress((size * np.array(causes[name]) + noise).tolist(), causes)
        assert found is not None
        for slope in found.slopes:
            if slope.name == name:
                assert slope.value == pytest.approx(size, abs=4.0 * slope.standard_error)
                assert abs(slope.t) > 5.0
            else:
                assert abs(slope.t) < 3.5


def test_causes_that_vary_together_are_named_and_not_told_apart() -> None:
    causes = samples(12, 9)
    causes["throughput"] = [1000.0 * h for h in causes["hours"]]
    d = [-2.0 * h for h in causes["hours"]]
    found = regress(d, causes)
    assert found is not None
    assert found.together == ("hours", "throughput")
    assert [s.name for s in found.slopes] == ["table shape"]
    assert found.freedom == 10


def test_a_cause_that_never_occurred_is_named() -> None:
    causes = samples(8, 10)
    causes["throughput"] = [0.0] * 8
    noise = np.random.default_rng(1).standard_normal(8)
    found = regress(noise.tolist(), causes)
    assert found is not None
    assert found.unvaried == ("throughput",)
    assert {s.name for s in found.slopes} == {"hours", "table shape"}
    assert not found.together


def test_too_few_periods_give_no_slopes() -> None:
    assert regress([1.0, 2.0, 3.0], samples(3, 1)) is None
    assert regress([1.0, 2.0], {"hours": [0.0, 0.0]}) is None


def test_causes_that_nearly_vary_together_are_said_to() -> None:
    near, other = samples(20, 2), samples(20, 5)["hours"]
    near["throughput"] = [h + 1e-3 * x for h, x in zip(near["hours"], other, strict=True)]
    found = regress(list(range(20)), near)
    assert found is not None
    assert found.hardly
    assert not found.together
    plain = regress(list(range(20)), samples(20, 2))
    assert plain is not None
    assert not plain.hardly


def test_three_causes_that_hang_together_are_all_named() -> None:
    causes = samples(20, 2)
    causes["throughput"] = [
        h + 1e-3 * x for h, x in zip(causes["hours"], causes["table shape"], strict=True)
    ]
    found = regress(list(range(20)), causes)
    assert found is not None
    assert found.together == ("hours", "throughput", "table shape")
    assert found.slopes == ()


@given(st.floats(1e-3, 1e3), st.floats(1e-3, 1e3))
def test_a_change_of_units_changes_no_t(scale: float, of_cause: float) -> None:
    causes = samples(15, 12)
    d = np.random.default_rng(13).standard_normal(15)
    one = regress(d.tolist(), causes)
    scaled = causes | {"hours": [of_cause * h for h in causes["hours"]]}
    other = regress((scale * d).tolist(), scaled)
    assert one is not None
    assert other is not None
    assert [s.t for s in other.slopes] == pytest.approx([s.t for s in one.slopes], rel=1e-6)


# Drift

KG_PER_PA = math.pi * 100.0 / 9.81


def test_the_published_check_of_an_idle_tank() -> None:
    # 5 Pa a minute for 12 h: 0.054 Pa/h, 1.7 kg/h if white; about 13 kg/h with 12 effective.
    white = white_error(5.0, 720, 12.0)
    assert white == pytest.approx(0.054, abs=0.0005)
    assert white * KG_PER_PA == pytest.approx(1.7, abs=0.05)
    assert slope_error(white, 720, 12.0) * KG_PER_PA == pytest.approx(13.0, abs=0.5)
    assert pytest.approx(32.0, abs=0.05) == KG_PER_PA


def autoregressive(n: int, phi: float, rng: np.random.Generator) -> np.ndarray:
    """Noise of unit variance whose correlation falls by phi a step."""
    y = np.empty(n)
    y[0] = rng.standard_normal()
    steps = math.sqrt(1.0 - phi**2) * rng.standard_normal(n)
    for k in range(1, n):
        y[k] = phi * y[k - 1] + steps[k]
    return y


def test_the_drift_of_white_noise_is_as_well_known_as_published() -> None:
    rng = np.random.default_rng(20)
    t = np.arange(720) / 60.0
    found = [drift(t.tolist(), (5.0 * rng.standard_normal(720)).tolist()) for _ in range(60)]
    errors = [d.standard_error for d in found if d is not None]
    assert len(errors) == 60
    assert float(np.median(errors)) == pytest.approx(0.054, rel=0.25)
    assert all(d is not None and d.white_standard_error <= d.standard_error for d in found)


def test_correlated_noise_is_not_taken_for_a_drift() -> None:
    # About 12 effective readings of 720: tau = (1 + phi) / (1 - phi) = 60 steps.
    rng = np.random.default_rng(21)
    phi = 59.0 / 61.0
    t = np.arange(720) / 60.0
    found = [drift(t.tolist(), (5.0 * autoregressive(720, phi, rng)).tolist()) for _ in range(200)]
    known = [d for d in found if d is not None]
    slopes = np.array([d.per_hour for d in known])
    errors = np.array([d.standard_error for d in known])
    white = np.array([d.white_standard_error for d in known])
    # The scatter of the slopes is what the standard error claims to be.
    assert float(np.std(slopes)) > 5.0 * float(np.median(white))
    assert 0.6 < float(np.median(errors)) / float(np.std(slopes)) < 1.5
    claimed = sum(abs(d.significance or 0.0) > 1.0 for d in known)
    assert claimed / len(known) < 0.15
    naive = sum(abs(s) > 2.0 * w for s, w in zip(slopes, white, strict=True))
    assert naive / len(known) > 0.5


def test_effective_numbers_lie_between_three_and_all() -> None:
    rng = np.random.default_rng(22)
    assert effective_number(rng.standard_normal(1000)) == pytest.approx(1000.0, rel=0.3)
    assert effective_number(np.tile([1.0, -1.0], 50)) == 100.0
    slow = np.sin(np.linspace(0.0, 2.0 * math.pi, 500))
    assert 3.0 <= effective_number(slow) < 10.0
    assert effective_number(np.zeros(10)) == 10.0


def test_daily_cycles_do_not_show_as_drift() -> None:
    rng = np.random.default_rng(23)
    t = np.arange(0.0, 5 * 24.0, 0.25)
    y = 900.0 * np.sin(2.0 * math.pi * t / 24.0) - 2.0 * t + 20.0 * rng.standard_normal(len(t))
    found = drift(t.tolist(), y.tolist())
    assert found is not None
    assert found.cycles == 5
    assert found.whole_days
    assert found.per_hour == pytest.approx(-2.0, abs=0.2)
    assert (found.significance or 0.0) < -1.0
    part = drift(t[: 24 * 4 + 48].tolist(), y[: 24 * 4 + 48].tolist())
    assert part is not None
    assert not part.whole_days


def test_a_part_cycle_at_the_end_is_left_out() -> None:
    t = np.arange(0.0, 3.5 * 24.0, 1.0)
    y = 100.0 * np.sin(2.0 * math.pi * t / 24.0)
    found = drift(t.tolist(), y.tolist())
    assert found is not None
    assert found.cycles == 3
    assert found.per_hour == pytest.approx(0.0, abs=1e-9)


@given(st.floats(-50.0, 50.0), st.integers(5, 60))
def test_an_exact_slope_is_found_whatever_the_times(slope: float, count: int) -> None:
    t = [0.3 * k for k in range(count)]
    found = drift(t, [100.0 + slope * x for x in t])
    assert found is not None
    assert found.per_hour == pytest.approx(slope, abs=1e-9)


def test_too_few_readings_have_no_drift() -> None:
    assert drift([0.0, 1.0, 2.0], [1.0, 2.0, 3.0]) is None
    assert drift([1.0] * 5, [1.0] * 5) is None


def test_few_degrees_of_freedom_widen_the_coverage() -> None:
    # JCGM 100, table G.2, 95.45 %.
    for freedom, published in ((1, 13.97), (2, 4.53), (5, 2.65), (10, 2.28), (50, 2.05)):
        assert coverage(freedom) == pytest.approx(published, abs=0.005)
    wide = [coverage(f) for f in range(1, 30)]
    assert all(a > b for a, b in itertools.pairwise(wide))
