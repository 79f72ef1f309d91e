"""The own range: covers as promised, is calibrated, narrowed by readings, not dragged by one wild one."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pytest
from simulated_drivers import LONG_AGO_H, SimulatedDriver, history_of, straight_to, uniform_at_1_pct

from planner.checks import FloatArray
from planner.errors import InputError
from planner.physiology.acclimatisation import ExposureHistory, ventilatory_state_at
from planner.physiology.expectation import expected_spo2
from planner.physiology.learning import learned
from planner.physiology.normal import _cumulative
from planner.physiology.person import PersonPosterior, population_latents
from planner.physiology.population import POPULATION
from planner.physiology.ventilation import _chain

PLACES_M = (0.0, 1600.0, 2300.0, 3500.0)
# Home, a week at 1600 m, home, a week at 2300 m, home: a season's first rounds.
SEASON = history_of((LONG_AGO_H, 0.0), (240.0, 1600.0), (408.0, 0.0), (720.0, 2300.0), (888.0, 0.0))
DAYS_READ = np.array([1, 2, 4, 6, 8, 11, 12, 14, 16, 19, 25, 31, 32, 33, 35, 36, 40, 45]) * 24.0


def taught(
    history: ExposureHistory, at_h: FloatArray, read: FloatArray, device: str = "a"
) -> PersonPosterior:
    return learned(
        history.inspired_at(at_h),
        np.asarray(ventilatory_state_at(history, at_h)),
        read,
        [device] * read.size,
        at_h,
    )


def width_at_2300_m(person: PersonPosterior | None) -> float:
    e = expected_spo2(straight_to(2300.0), 36.0, person=person)
    return float(e.high_spo2_pct - e.low_spo2_pct)


@dataclass(frozen=True)
class Trial:
    driver: SimulatedDriver
    person: PersonPosterior


@pytest.fixture(scope="module")
def trials() -> list[Trial]:
    """Drivers drawn from the population with a season's readings each, faulty ones among them."""
    random = np.random.default_rng(2024)
    made = []
    for _ in range(400):
        driver = SimulatedDriver.drawn(random)
        read = driver.readings(SEASON, DAYS_READ, random, faulty=True)
        made.append(Trial(driver, taught(SEASON, DAYS_READ, read)))
    return made


@pytest.mark.parametrize("elevation", PLACES_M)
def test_population_range_covers_new_drivers(elevation: float) -> None:
    random = np.random.default_rng(7)
    history, at_h = straight_to(elevation), np.array([36.0])
    e = expected_spo2(history, 36.0)
    read = np.array([SimulatedDriver.drawn(random).readings(history, at_h, random)[0] for _ in range(4000)])
    inside = np.mean((read >= e.low_spo2_pct) & (read <= e.high_spo2_pct))
    assert 0.93 <= inside <= 0.97


@pytest.mark.parametrize("elevation", PLACES_M)
def test_own_range_covers_that_drivers_new_readings(elevation: float, trials: list[Trial]) -> None:
    random = np.random.default_rng(11)
    history, at_h = straight_to(elevation), np.full(10, 36.0)
    inside = []
    for trial in trials:
        e = expected_spo2(history, 36.0, person=trial.person)
        read = trial.driver.readings(history, at_h, random)
        inside.append(np.mean((read >= e.low_spo2_pct) & (read <= e.high_spo2_pct)))
    assert 0.93 <= np.mean(inside) <= 0.97


def test_simulation_based_calibration(trials: list[Trial]) -> None:
    """The true value's place in its posterior is uniform when the posterior is right (Talts 2018)."""
    breathing, offset, admixture = [], [], []
    for trial in trials:
        latents = trial.person.latents()
        spacing = latents.breathing[1] - latents.breathing[0]
        below = np.append(0.0, np.cumsum(latents.weight))
        edges = np.append(latents.breathing - spacing / 2, latents.breathing[-1] + spacing / 2)
        breathing.append(np.interp(trial.driver.breathing, edges, below))
        sd = np.maximum(latents.offset_sd_pct, 1e-9)
        offset.append(latents.weight @ _cumulative((trial.driver.offset - latents.offset_mean_pct) / sd))
        of_person = trial.person.admixture_pct
        true = POPULATION.venous_admixture_pct + trial.driver.admixture
        admixture.append(float(_cumulative(np.asarray((true - of_person.mean) / of_person.sd))))
    assert uniform_at_1_pct(np.array(breathing))
    assert uniform_at_1_pct(np.array(offset))
    assert uniform_at_1_pct(np.array(admixture))


def test_calibration_would_show_a_wrong_posterior(trials: list[Trial]) -> None:
    """The same test refuses a posterior that is a third as wide as it should be."""
    places = []
    for trial in trials:
        latents = trial.person.latents()
        sd = 0.33 * np.maximum(latents.offset_sd_pct, 1e-9)
        places.append(latents.weight @ _cumulative((trial.driver.offset - latents.offset_mean_pct) / sd))
    assert not uniform_at_1_pct(np.array(places))


@pytest.mark.parametrize("stays", [((LONG_AGO_H, 0.0),), ((LONG_AGO_H, 0.0), (120.0, 1600.0))])
def test_ten_readings_low_down_narrow_the_range_at_2300_m(stays: tuple[tuple[float, float], ...]) -> None:
    history = history_of(*stays)
    at_h = np.arange(1, 11) * 24.0
    random = np.random.default_rng(5)
    widths = [
        width_at_2300_m(taught(history, at_h, SimulatedDriver.drawn(random).readings(history, at_h, random)))
        for _ in range(20)
    ]
    assert max(widths) <= 0.85 * width_at_2300_m(None)


def test_one_reading_15_points_low_among_twenty_barely_moves_the_range() -> None:
    at_h = np.arange(1, 21) * 24.0
    history = history_of((LONG_AGO_H, 0.0), (300.0, 1600.0))
    random = np.random.default_rng(6)
    for _ in range(10):
        read = SimulatedDriver.drawn(random).readings(history, at_h, random)
        wild = read.copy()
        wild[random.integers(20)] -= 15.0
        sound, dragged = (
            expected_spo2(straight_to(2300.0), 36.0, person=taught(history, at_h, r)) for r in (read, wild)
        )
        assert abs(dragged.low_spo2_pct - sound.low_spo2_pct) < 0.5
        assert abs(dragged.high_spo2_pct - sound.high_spo2_pct) < 0.5
        assert abs(dragged.mean_spo2_pct - sound.mean_spo2_pct) < 0.5


def test_grid_equals_plain_sums_over_a_dense_grid() -> None:
    """computed: the same posterior by plain sums in double precision on a grid of its own, two devices."""
    random = np.random.default_rng(8)
    driver = SimulatedDriver(0.8, 0.5, -1.0)
    read = driver.readings(SEASON, DAYS_READ, random)
    other = np.arange(read.size) % 3 == 0
    read[other] += 2.2  # the second oximeter reads higher
    devices = ["b" if o else "a" for o in other]
    inspired = SEASON.inspired_at(DAYS_READ)
    state = np.asarray(ventilatory_state_at(SEASON, DAYS_READ))
    person = learned(inspired, state, read, devices, DAYS_READ)

    breathing = np.linspace(-4.0, 4.0, 81)
    admixture = np.linspace(-3.0, 3.0, 61)
    bias = np.linspace(-4.0, 4.0, 81)
    p = POPULATION
    log_weight = -0.5 * breathing[:, None] ** 2 - 0.5 * (admixture / p.admixture_sd_pct) ** 2
    of_device = {}
    for device in ("a", "b"):
        ours = [i for i, d in enumerate(devices) if d == device]
        log = -0.5 * (bias / p.device_bias_sd_pct) ** 2 + np.zeros((81, 61, 81))
        for i in ours:
            chain = _chain(inspired[i], state[i], breathing, asleep=False, population=p)
            variance = (
                p.day_sd_pct**2
                + (p.day_alveolar_sd_mmhg * chain.slope_pct_per_mmhg) ** 2
                + (0.2094 / 1.3332239 * 2.0 * chain.slope_pct_per_mmhg) ** 2
                + (
                    p.oximeter_noise_sd_pct
                    + p.oximeter_noise_slope * (100.0 - p.venous_admixture_pct - chain.saturation)
                )
                ** 2
            )[:, None, None]
            miss = read[i] - chain.saturation[:, None, None] + admixture[None, :, None] - bias
            sound = np.exp(-0.5 * miss**2 / variance) / np.sqrt(2.0 * np.pi * variance)
            log += np.log((1.0 - p.faulty_share) * sound + p.faulty_share / 60.0)
        of_device[device] = log
        log_weight = log_weight + np.log(np.exp(log).sum(axis=2))
    weight = np.exp(log_weight - log_weight.max())
    weight /= weight.sum()
    for values, axis, estimate, shift in (
        (breathing, 1, person.breathing, 0.0),
        (admixture, 0, person.admixture_pct, p.venous_admixture_pct),
    ):
        marginal = weight.sum(axis=axis)
        mean = marginal @ values
        sd = np.sqrt(marginal @ (values - mean) ** 2)
        assert estimate.mean == pytest.approx(mean + shift, abs=0.02)
        assert estimate.sd == pytest.approx(sd, abs=0.02)
    for device, log in of_device.items():
        rest = log_weight - np.log(np.exp(log).sum(axis=2))
        joint = np.exp(log + rest[:, :, None] - log_weight.max())
        marginal = joint.sum(axis=(0, 1)) / joint.sum()
        mean = marginal @ bias
        sd = np.sqrt(marginal @ (bias - mean) ** 2)
        assert person.device_bias_pct[device].mean == pytest.approx(mean, abs=0.02)
        assert person.device_bias_pct[device].sd == pytest.approx(sd, abs=0.02)
    assert person.usual_device == "a"
    assert person.device_bias_pct["b"].mean > person.device_bias_pct["a"].mean + 1.5


def test_oximeters_that_contradict_each_other_leave_a_range() -> None:
    """Products of so many likelihoods are zero in double precision; their logarithms are not."""
    history = straight_to(3500.0)
    at_h = np.arange(-1500, 1500) * 12.0
    read = np.where(at_h < 0.0, 97.0, np.where(np.arange(at_h.size) % 2, 98.0, 80.0))
    inspired, state = history.inspired_at(at_h), np.asarray(ventilatory_state_at(history, at_h))
    person = learned(inspired, state, read, ["high", "low"] * 1500, at_h)
    e = expected_spo2(history, 36.0, person=person)
    assert 0.0 < e.low_spo2_pct < e.high_spo2_pct <= 100.0
    assert np.isfinite([person.breathing.sd, person.device_bias_pct["low"].sd, person.own_share]).all()


def test_another_oximeter_shifts_its_own_range_only() -> None:
    at_h = np.arange(1, 31) * 24.0
    history = straight_to(0.0)
    inspired, state = history.inspired_at(at_h), np.asarray(ventilatory_state_at(history, at_h))
    read = np.where(np.arange(30) < 20, 97.0, 94.5)
    person = learned(inspired, state, read, ["good"] * 20 + ["low"] * 10, at_h)
    by_device = {d: expected_spo2(history, 800.0, person=person, device=d) for d in ("good", "low", "new")}
    assert by_device["good"].mean_spo2_pct == pytest.approx(97.0, abs=0.3)
    assert by_device["low"].mean_spo2_pct == pytest.approx(94.6, abs=0.3)
    assert by_device["new"].high_spo2_pct - by_device["new"].low_spo2_pct > 1.15 * (
        by_device["good"].high_spo2_pct - by_device["good"].low_spo2_pct
    )


def test_readings_aloft_tell_how_somebody_breathes() -> None:
    history = straight_to(3500.0)
    at_h = np.arange(2, 12) * 24.0
    random = np.random.default_rng(9)
    strong, weak = (
        taught(history, at_h, SimulatedDriver(z, 0.0, 0.0).readings(history, at_h, random))
        for z in (1.5, -1.5)
    )
    assert strong.breathing.mean > 0.4 > -0.4 > weak.breathing.mean
    assert strong.breathing.sd < 0.8
    assert strong.readings_above_1500_m == 10


def test_no_reading_is_the_population() -> None:
    nobody = learned(np.empty(0), np.empty(0), np.empty(0), [], np.empty(0))
    assert nobody.readings == 0
    assert nobody.own_share == 0.0
    for elevation in PLACES_M:
        known, unknown = (expected_spo2(straight_to(elevation), 36.0, person=p) for p in (nobody, None))
        assert known.low_spo2_pct == pytest.approx(unknown.low_spo2_pct, abs=0.01)
        assert known.high_spo2_pct == pytest.approx(unknown.high_spo2_pct, abs=0.01)


def test_own_share_grows_with_readings() -> None:
    history = SEASON
    random = np.random.default_rng(10)
    read = SimulatedDriver.drawn(random).readings(history, DAYS_READ, random)
    shares = [taught(history, DAYS_READ[:n], read[:n]).own_share for n in (1, 3, 6, 18)]
    assert np.all(np.diff(shares) > 0.0)
    assert 0.0 < shares[0] < 0.75
    assert shares[-1] < 1.0


def test_five_readings_in_one_sitting_count_less_than_on_five_days() -> None:
    history = straight_to(1600.0)
    read = np.full(5, 96.5)
    in_one_sitting = taught(history, 240.0 + np.arange(5) * 0.1, read)
    on_five_days = taught(history, 240.0 + np.arange(5) * 24.0, read)
    alone = taught(history, np.array([240.0]), read[:1])
    assert alone.own_share < in_one_sitting.own_share < on_five_days.own_share


def test_readings_all_round_the_clock_count_as_many_days() -> None:
    history = straight_to(1600.0)
    daily, all_round_the_clock = (
        taught(history, 240.0 + np.arange(0.0, 240.0, every_h), np.full(round(240 / every_h), 96.5))
        for every_h in (24.0, 5.0)
    )
    assert all_round_the_clock.breathing.sd < daily.breathing.sd
    assert all_round_the_clock.own_share > daily.own_share


def test_parts_of_an_own_range_add_up() -> None:
    at_h = np.arange(1, 11) * 24.0
    person = taught(straight_to(0.0), at_h, np.full(10, 96.0))
    e = expected_spo2(straight_to(2300.0), 36.0, person=person)
    unknown = expected_spo2(straight_to(2300.0), 36.0)
    parts = np.array([e.between_people_sd_pct, e.day_to_day_sd_pct, e.oximeter_sd_pct, e.pressure_sd_pct])
    # For a nearly normal mixture a 95 % range is 2 x 1.96 standard deviations wide (published, any table).
    assert 2 * 1.96 * np.sqrt(np.sum(parts**2)) == pytest.approx(e.high_spo2_pct - e.low_spo2_pct, rel=0.02)
    assert e.between_people_sd_pct < unknown.between_people_sd_pct
    assert e.oximeter_sd_pct < unknown.oximeter_sd_pct
    assert e.day_to_day_sd_pct == pytest.approx(unknown.day_to_day_sd_pct, rel=0.05)


def test_population_weights_sum_to_one() -> None:
    latents = population_latents()
    assert latents.weight.sum() == pytest.approx(1.0)
    assert latents.weight @ latents.breathing**2 == pytest.approx(1.0, abs=0.01)


def test_lengths_that_differ_and_impossible_readings_are_refused() -> None:
    with pytest.raises(InputError, match="as many readings"):
        learned(np.array([140.0]), np.array([0.0]), np.array([97.0, 96.0]), ["a"], np.array([0.0]))
    with pytest.raises(InputError, match="spo2_pct"):
        learned(np.array([140.0]), np.array([0.0]), np.array([9.7]), ["a"], np.array([0.0]))
