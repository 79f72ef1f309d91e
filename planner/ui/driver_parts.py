"""The parts of the Driver page that explain: one reading, what was learned, the model behind it."""

from __future__ import annotations

import streamlit as st

from planner.charts.theme import LEFT_OUT_STYLE, OUTCOME_STYLES
from planner.monitoring.own_range import own_share
from planner.physiology.person import Estimate
from planner.physiology.population import POPULATION, population_model_summary
from planner.services.course import POSSESSIVES
from planner.services.driver import DriverView, Explanation
from planner.services.readings import reading_words
from planner.services.season import RoundCost
from planner.ui.morning_rows import outcome_html
from planner.ui.page import Context, line
from planner.ui.tables import note, table
from planner.ui.text import escaped
from planner.wording import (
    DASH,
    MINUS,
    clock,
    counted,
    day,
    elevation,
    number,
    number_range,
    per_cent,
    per_cent_range,
)

ASLEEP_GLYPH = "◆"


def draw_legend() -> None:
    """What the shapes and lines of the chart mean, in words."""
    shapes = [f"{OUTCOME_STYLES[word].glyph} {word}" for word in ("in range", "repeat", "refer", "urgent")]
    shapes += [f"{ASLEEP_GLYPH} asleep", f"{LEFT_OUT_STYLE.glyph} left out"]
    note(
        f"{' · '.join(shapes)}. Band: the driver's own range awake at rest, as it was known then. Dashed: "
        "the population's. Below: where the driver sleeps."
    )


def draw_explanation(view: DriverView, found: Explanation) -> None:
    """Why one reading came out as it did."""
    reading, judgement = found.mark.reading, found.mark.judgement
    st.html(
        f'<div class="p-why">{outcome_html(judgement.outcome)} {escaped(" ".join(judgement.reasons))} '
        f'<span class="p-do">{escaped(judgement.advice)}</span></div>'
    )
    if found.mark.teaches_nothing:
        line(f"It teaches the range nothing: {found.mark.teaches_nothing}.")
    expected = found.mark.sample.expected
    known = counted(found.readings_known, "reading") if found.readings_known else "the population alone"
    note(
        f"{signed(found.residual_pct)} points from the middle of the range, {number(expected.mean_pct, 1)} %."
        f" The range rested on {known}; readings of the same stay do not move it."
    )
    own, population = found.own, found.population
    table(
        ["What spreads a reading", "own", "population"],
        [
            [name, points(getattr(own, field)), points(getattr(population, field))]
            for name, field in (
                ("between people", "between_people_sd_pct"),
                ("from day to day", "day_to_day_sd_pct"),
                ("the oximeter", "oximeter_sd_pct"),
                ("the air pressure", "pressure_sd_pct"),
            )
        ],
        right=(1, 2),
    )
    note("Standard deviations in points of saturation; their squares add up, and the range holds 95 %.")
    table(
        ["From air to blood, median person", "", "by"],
        [
            ["inspired oxygen", f"{number(float(own.inspired_po2_mmhg), 1)} mmHg", "FIO2 (PB − 47)"],
            ["PaCO2", f"{number(float(own.paco2_mmhg), 1)} mmHg", "fitted, by elevation and days there"],
            [
                "alveolar oxygen",
                f"{number(float(own.alveolar_po2_mmhg), 1)} mmHg",
                "full alveolar gas equation",
            ],
            ["pH", number(float(own.ph), 2), "Henderson-Hasselbalch"],
            ["arterial oxygen", f"{number(float(own.arterial_po2_mmhg), 1)} mmHg", "less venous admixture"],
            [
                "SpO2, population's middle",
                f"{number(float(population.mean_spo2_pct), 1)} %",
                "Severinghaus 1979 with Bohr shift",
            ],
        ],
        right=(1,),
    )
    zone = view.calendar.places[reading.place_id].zone
    note(f"The reading: {reading_words(reading, zone)}{f', {reading.device}' if reading.device else ''}.")


def draw_taught(view: DriverView) -> None:
    """What the readings have taught so far, against what is known of anybody."""
    person, whose = view.person, POSSESSIVES[view.driver.sex]
    rows = [
        ["breathing, in spreads between people", "0 ± 1", estimate(person.breathing)],
        [
            "venous admixture, points lost",
            f"{number(POPULATION.venous_admixture_pct, 1)} ± {number(POPULATION.admixture_sd_pct, 1)}",
            f"{number(person.admixture_pct.mean, 1)} ± {number(person.admixture_pct.sd, 1)}",
        ],
    ]
    of_any = f"0 ± {number(POPULATION.device_bias_sd_pct, 1)}"
    rows += [
        [f"bias of {name or 'an oximeter without a name'}, points", of_any, estimate(bias)]
        for name, bias in sorted(person.device_bias_pct.items())
    ]
    table(
        [f"What {whose} readings have taught", "anybody", view.driver.name],
        rows,
        right=(1, 2),
    )
    note(
        f"Mean ± standard deviation. About {own_share(person)} of what differs between people "
        f"and oximeters is settled by {whose} own readings; what differs from day to day stays in every "
        "range. Stronger breathing and less admixture give higher readings."
    )


def draw_next_round(ctx: Context, view: DriverView) -> None:
    """The next high round as it would look for this driver."""
    pair = view.next_high_round
    if pair is None:
        line("No high round ahead.")
        return
    own, population = pair
    zone = own.place.zone
    line(
        f"{own.round.name}, {elevation(own.place.track_elevation_m, ctx.units)}, from "
        f"{day(own.first_session.starts_at, zone)}, {clock(own.first_session.starts_at, zone)}."
    )
    if own.outlook is None or population.outlook is None:
        line("No stay there is planned yet.")
        return
    given, anybody = own.outlook, population.outlook
    table(
        ["SpO2 expected there", view.driver.name, "population"],
        [
            [
                name,
                per_cent_range(getattr(given, field).low, getattr(given, field).high),
                per_cent_range(getattr(anybody, field).low, getattr(anybody, field).high),
            ]
            for name, field in (
                ("first session", "first_session_spo2_pct"),
                ("race morning", "race_spo2_pct"),
            )
        ],
        right=(1, 2),
    )
    table(["By the present plan", ""], plan_rows(own), right=(1,))
    note(
        "Aerobic capacity by published averages, not by the driver's readings. Risk class of the planned "
        "ascent by the Wilderness Medical Society 2024: a caution, and the physician decides."
    )


def plan_rows(cost: RoundCost) -> list[list[str]]:
    """What the plan gives besides saturation."""
    given = cost.outlook
    if given is None:
        return []
    capacity = given.race_capacity_pct
    offset = abs(given.clock_offset_h)
    return [
        ["nights there before", str(cost.nights_there)],
        [
            "aerobic capacity on race morning",
            f"{per_cent(capacity.mean)} ({number_range(capacity.low, capacity.high)})",
        ],
        ["body clock off by", f"{number(offset, 1)} h" if offset >= 0.05 else DASH],
        ["risk class of the ascent", given.risk],
    ]


def draw_model() -> None:
    """The model behind every range: formulas, constants, residuals."""
    summary = population_model_summary()
    for formula in summary.formulas:
        note(formula)
    table(
        ["constant", "value", "unit", "kind", "source"],
        [
            [
                row.meaning,
                f"{row.value:.3g}" + (f" ± {row.sd:.1g}" if row.sd else ""),
                "" if row.unit == "1" else row.unit,
                row.kind,
                row.source,
            ]
            for row in summary.parameters
        ],
        right=(1,),
        stack=True,
    )
    table(
        ["published row", "published", "model", "off by", "source"],
        [
            [row.case, number(row.expected, 1), number(row.fitted, 1), signed(row.residual), row.source]
            for row in summary.residuals
        ],
        right=(1, 2, 3),
        caption=f"Residuals; root mean square of saturations {number(summary.saturation_rmse_pct, 1)} points",
        stack=True,
    )


def points(value: object) -> str:
    """A standard deviation in points."""
    return f"± {number(float(value), 1)}"  # type: ignore[arg-type]


def signed(value: float) -> str:
    """A difference with its sign."""
    text = number(abs(value), 1)
    return text if text == number(0.0, 1) else f"{'+' if value > 0 else MINUS}{text}"


def estimate(found: Estimate) -> str:
    """Mean and standard deviation."""
    return f"{signed(found.mean)} ± {number(found.sd, 1)}"
