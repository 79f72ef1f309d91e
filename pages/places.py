"""Places: what is the air like there?"""

from __future__ import annotations

import pandas as pd
import streamlit as st

from planner.charts.places import first_days_chart
from planner.errors import InputError
from planner.season.model import Place, PressureMeasurement
from planner.services import places as venues
from planner.services.air import SiteAir
from planner.ui.errors import show_error
from planner.ui.page import Context, answer, end_page, line, note_for_next_run, start_page
from planner.ui.tables import note, table
from planner.units import from_house, to_house
from planner.wording import (
    DASH,
    clock,
    counted,
    day,
    elevation,
    number,
    per_cent,
    per_cent_range,
    pressure,
    zone_name,
)

HALF_DAYS = tuple(half / 2 for half in range(29))
QFF_WARNING = (
    "Type the pressure that a barometer at the track shows (station pressure), or the altimeter setting "
    "(QNH) of an aerodrome nearby. A sea-level pressure from a weather map or a telephone (QFF) was reduced "
    "with the temperature of the site and is several hPa wrong at 2 000 m: do not use it here."
)


def main() -> None:
    """Draw the page."""
    ctx = start_page("Places")
    known = sorted(ctx.store.all(Place), key=lambda place: -place.track_elevation_m)
    if not known:
        answer("No places yet. Add the first one on Team.")
    else:
        place = st.selectbox(
            "Place",
            known,
            index=known.index(venues.place_to_show(ctx.store, known, ctx.now)),
            format_func=lambda each: f"{each.name}, {elevation(each.track_elevation_m, ctx.units)}",
            key="places_place",
            persist_state="session",
        )
        show_place(ctx, place)
    end_page(ctx)


def show_place(ctx: Context, place: Place) -> None:
    """Draw everything about one place."""
    history = venues.pressures_of(ctx.store, place)
    in_force = venues.pressure_in_force(history, ctx.now)
    air = venues.venue_air(place, in_force.pressure_hpa if in_force else float("nan"))
    arrival = venues.days_there(air.beds)[0]
    answer(
        f"{place.name}: {pressure(air.track.pressure_hpa, ctx.units)}, "
        f"{per_cent(air.track.oxygen_share_pct)} of the oxygen at sea level. Straight from sea level, expect "
        f"SpO2 {per_cent_range(arrival.low_pct, arrival.high_pct)} on arrival."
    )
    line(origin_of_pressure(place, in_force, air.track, ctx))
    left, right = st.columns([5, 6], gap="large")
    with left:
        show_air(ctx, air)
    with right:
        show_days(ctx, air)
    show_measuring(ctx, place, in_force, len(history))
    show_history(ctx, place, history)


def origin_of_pressure(
    place: Place, in_force: PressureMeasurement | None, track: SiteAir, ctx: Context
) -> str:
    """Say where the pressure in use comes from and how sure it is."""
    sure = f"give or take {number(2 * from_house('pressure', track.pressure_sd_hpa, ctx.units.pressure), 0)}"
    unit = ctx.units.pressure
    if in_force is None:
        return f"Pressure by the {track.pressure_from}, {sure} {unit} with the weather."
    return (
        f"Pressure measured at the track on {day(in_force.measured_at, place.zone)}, "
        f"{clock(in_force.measured_at, place.zone)} {zone_name(place.zone, in_force.measured_at)} "
        f"({in_force.typed}), {sure} {unit}."
    )


def show_air(ctx: Context, air: venues.VenueAir) -> None:
    """Draw the air at the track and, if they lie elsewhere, at the beds."""
    columns = [("Track", air.track)] + ([("Beds", air.beds)] if air.beds_differ else [])
    sites = [site for _, site in columns]
    rows = [
        ["Elevation", *(elevation(site.elevation_m, ctx.units) for site in sites)],
        ["Pressure", *(pressure(site.pressure_hpa, ctx.units) for site in sites)],
        ["Inspired oxygen", *(oxygen_tension(site.inspired_po2_mmhg, ctx) for site in sites)],
        ["… of sea level", *(per_cent(site.oxygen_share_pct) for site in sites)],
        ["Density of the air", *(f"{number(site.air_density_kg_m3, 3)} kg/m³" for site in sites)],
        ["… of sea level", *(per_cent(site.density_share_pct) for site in sites)],
    ]
    head = ["", *(name for name, _ in columns)]
    table(head, rows, right=range(1, len(head)), caption="The air there")
    note("Density of dry air at the standard temperature there; a hot day thins it further.")


def show_days(ctx: Context, air: venues.VenueAir) -> None:
    """Draw what to expect by days there, at the elevation of the beds."""
    shown = venues.days_there(air.beds)
    names = ["On arrival", *(f"Day {each.days:.0f}" for each in shown[1:])]
    rows = [
        [
            name,
            per_cent_range(each.low_pct, each.high_pct),
            per_cent(each.mean_pct),
            per_cent_range(each.low_capacity_pct, each.high_capacity_pct),
        ]
        for name, each in zip(names, shown, strict=True)
    ]
    table(
        ["", "SpO2 expected", "middle", "aerobic capacity"],
        rows,
        right=(1, 2, 3),
        caption=f"Somebody straight from sea level, living at {elevation(air.beds.elevation_m, ctx.units)}",
    )
    course = venues.days_there(air.beds, HALF_DAYS)
    frame = pd.DataFrame(
        {
            "days": [each.days for each in course],
            "low": [each.low_pct for each in course],
            "mean": [each.mean_pct for each in course],
            "high": [each.high_pct for each in course],
            "range": [per_cent_range(each.low_pct, each.high_pct) for each in course],
        }
    )
    st.vega_lite_chart(
        spec=first_days_chart(frame),
        theme=None,
        width="stretch",
        alt=f"Expected SpO2 over two weeks there: {rows[0][1]} on arrival, {rows[-1][1]} on day 14",
    )
    note(
        "SpO2 awake at rest. The range holds 95 % of single readings of healthy people, oximeter included; "
        "the aerobic capacity is per cent of one's own at sea level and no measure of lap time."
    )
    if any(each.beyond_validity for each in shown):
        line("This elevation lies beyond the data that the model was fitted to: an extrapolation.")


def show_measuring(ctx: Context, place: Place, in_force: PressureMeasurement | None, times_kept: int) -> None:
    """Draw the field for a measured pressure: it shows at once what it changes and is kept on a button.

    Under a new number of kept pressures the field is a new one, and empty.
    """
    st.subheader("Measured pressure", anchor=False)
    note(QFF_WARNING)
    with st.container(horizontal=True, vertical_alignment="bottom", gap="small"):
        kind = st.segmented_control(
            "What is typed",
            ["station pressure", "altimeter setting"],
            default="station pressure",
            required=True,
            key=f"pressure_kind_{place.id}",
            persist_state="session",
        )
        value = st.number_input(
            f"{kind.capitalize()}, {ctx.units.pressure}",
            value=None,
            step=0.1 if ctx.units.pressure == "kPa" else 1.0,
            format="%.2f" if ctx.units.pressure == "kPa" else "%.1f",
            key=f"pressure_in_{ctx.units.pressure}_{place.id}_{times_kept}",
            persist_state="session",
            placeholder="not measured",
            width=220,
        )
    if value is None:
        return
    try:
        typed = venues.typed_pressure(place, value, ctx.units.pressure, kind, ctx.now)
    except InputError as problem:
        show_error(problem)
        return
    show_change(ctx, place, in_force, typed)
    if st.button("Keep this pressure", type="primary"):
        kept = ctx.store.add(typed, by=ctx.who, why="pressure measured at the track")
        note_for_next_run(f"Kept: {pressure(kept.pressure_hpa, ctx.units)} at {place.name}.")
        st.rerun()


def show_change(
    ctx: Context, place: Place, in_force: PressureMeasurement | None, typed: PressureMeasurement
) -> None:
    """Draw what the typed pressure changes against what counts now."""
    before = venues.venue_air(place, in_force.pressure_hpa if in_force else float("nan"))
    after = venues.venue_air(place, typed.pressure_hpa)
    first, then = venues.days_there(before.beds)[0], venues.days_there(after.beds)[0]
    rows = [
        [
            "Pressure at the track",
            pressure(before.track.pressure_hpa, ctx.units),
            pressure(after.track.pressure_hpa, ctx.units),
        ],
        [
            "Inspired oxygen at the beds",
            oxygen_tension(before.beds.inspired_po2_mmhg, ctx),
            oxygen_tension(after.beds.inspired_po2_mmhg, ctx),
        ],
        [
            "SpO2 on arrival",
            f"{number(first.mean_pct, 1)} ({per_cent_range(first.low_pct, first.high_pct)})",
            f"{number(then.mean_pct, 1)} ({per_cent_range(then.low_pct, then.high_pct)})",
        ],
    ]
    table(["", "now", "with what you typed"], rows, right=(1, 2))
    away = venues.unusual_difference_hpa(place, typed.pressure_hpa)
    if away is not None:
        line(
            f"That is {pressure(abs(away), ctx.units)} {'above' if away > 0 else 'below'} the model "
            "atmosphere, more than weather usually does. Look again before keeping it."
        )


def show_history(ctx: Context, place: Place, history: list[PressureMeasurement]) -> None:
    """Draw the pressures kept for a place, with what can be taken back."""
    if not history:
        return
    rows = [
        [
            f"{day(each.measured_at, place.zone)}, {clock(each.measured_at, place.zone)}",
            pressure(each.pressure_hpa, ctx.units),
            each.typed or DASH,
        ]
        for each in history[:10]
    ]
    table(
        ["measured at", "pressure", "as typed"],
        rows,
        right=(1,),
        caption=f"{counted(len(history), 'pressure')} kept, the newest first",
    )
    if st.button("Take back the newest"):
        ctx.store.remove(history[0], by=ctx.who, why="taken back on Places")
        note_for_next_run(f"Taken back: {pressure(history[0].pressure_hpa, ctx.units)} at {place.name}.")
        st.rerun()


def oxygen_tension(value_mmhg: float, ctx: Context) -> str:
    """Oxygen tension in kPa for who reads kPa, in mmHg for everybody else, as the trade writes it."""
    if ctx.units.pressure == "kPa":
        return f"{number(from_house('pressure', to_house('pressure', value_mmhg, 'mmHg'), 'kPa'), 1)} kPa"
    return f"{number(value_mmhg)} mmHg"


main()
