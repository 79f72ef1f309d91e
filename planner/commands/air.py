"""`air ELEVATION_M`: the air at an elevation and the saturation to expect there."""

from __future__ import annotations

import argparse
import math

from planner.commands.command import Answer, Command, number

CAUTION = "Of healthy people at rest 95 % of readings lie in this range; no diagnosis, the physician decides."
NOT_THERE = (
    "The pressure is far from what the air at that elevation weighs: "
    "one reduced to sea level gives wrong figures."
)
BEYOND = "Beyond the elevations and times that the model was fitted to: an extrapolation."


def _add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("elevation_m", metavar="ELEVATION_M", type=number("m"), help="elevation [m]")
    parser.add_argument(
        "--pressure-hpa",
        metavar="P",
        type=number("hPa"),
        default=math.nan,
        help="station pressure as measured [hPa]; not one reduced to sea level",
    )
    parser.add_argument(
        "--latitude",
        metavar="D",
        type=number("degrees, north positive"),
        default=math.nan,
        help="latitude [deg], north positive: chooses the model atmosphere",
    )
    parser.add_argument(
        "--days",
        metavar="N",
        type=number("days"),
        default=0.0,
        help="days already spent there by somebody who came straight from sea level (default 0)",
    )
    parser.add_argument("--asleep", action="store_true", help="the saturation to expect asleep")


def _run(arguments: argparse.Namespace) -> Answer:
    # Imported here: numpy is not needed to print a usage line.
    from planner.season.pressure import IMPLAUSIBLE_SHARE
    from planner.services.air import capacity_there, site_air, straight_from_sea_level

    air = site_air(
        arguments.elevation_m,
        latitude_deg=arguments.latitude,
        measured_pressure_hpa=arguments.pressure_hpa,
    )
    days: float = arguments.days
    expected = straight_from_sea_level(air, days, wakefulness="asleep" if arguments.asleep else "awake")
    record = {
        "pressure_hpa": air.pressure_hpa,
        "pressure_from": air.pressure_from,
        "air_density_kg_m3": air.air_density_kg_m3,
        "inspired_po2_mmhg": air.inspired_po2_mmhg,
        "alveolar_po2_mmhg": float(expected.alveolar_po2_mmhg),
        "paco2_mmhg": float(expected.paco2_mmhg),
        "expected_spo2_pct": float(expected.mean_spo2_pct),
        "low_spo2_pct": float(expected.low_spo2_pct),
        "high_spo2_pct": float(expected.high_spo2_pct),
        "aerobic_capacity_pct": float(capacity_there(air, days).mean_pct),
    }
    model = site_air(arguments.elevation_m, latitude_deg=arguments.latitude)
    notes = []
    if abs(air.pressure_hpa / model.pressure_hpa - 1.0) > IMPLAUSIBLE_SHARE:
        notes.append(NOT_THERE)
    if expected.beyond_validity:
        notes.append(BEYOND)
    return Answer(record, notes=(*notes, CAUTION))


COMMAND = Command("air", "the air at an elevation and the saturation to expect there", _add_arguments, _run)
