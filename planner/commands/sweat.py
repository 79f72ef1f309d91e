"""`sweat`: the heat balance and the sweat rate of one person in stated conditions."""

from __future__ import annotations

import argparse

from planner.commands.command import Answer, Command, number

# Option, unit and help; the option's name carries the unit.
FIGURES = (
    ("air-c", "C", "air temperature in the cockpit [C]"),
    ("radiant-c", "C", "mean radiant or globe temperature [C]"),
    ("humidity-pct", "%", "relative humidity, 0 to 100 [%%]"),
    ("air-speed-m-s", "m/s", "speed of the air past the body [m/s]"),
    ("metabolic-w-m2", "W/m2", "metabolic rate [W/m2], about 230 in a closed car"),
    ("clo", "clo", "insulation of the clothing [clo], about 1.56 for racing overalls"),
    ("im", "1", "vapour permeability index of the clothing [1], 0.30 to 0.38 for a suit"),
    ("mass-kg", "kg", "body mass [kg]"),
    ("height-cm", "cm", "body height [cm]"),
)


def _add_arguments(parser: argparse.ArgumentParser) -> None:
    for name, unit, text in FIGURES:
        parser.add_argument(f"--{name}", metavar=name[0].upper(), type=number(unit), required=True, help=text)
    parser.add_argument(
        "--elevation-m", metavar="M", type=number("m"), default=None, help="elevation [m] (default sea level)"
    )


def _run(arguments: argparse.Namespace) -> Answer:
    # Imported here: numpy is not needed to print a usage line.
    from planner.services.sweat import sweat_in

    names = [name.replace("-", "_") for name, _, _ in FIGURES]
    found = sweat_in(**{name: getattr(arguments, name) for name in names}, elevation_m=arguments.elevation_m)
    record = {
        "required_w_m2": found.required_w_m2,
        "maximal_w_m2": found.maximal_w_m2,
        "sweat_rate_l_per_h": found.sweat_rate_l_per_h,
        "low_sweat_rate_l_per_h": found.low_sweat_rate_l_per_h,
        "high_sweat_rate_l_per_h": found.high_sweat_rate_l_per_h,
    }
    return Answer(record, notes=found.notes)


COMMAND = Command("sweat", "the sweat of one person in stated heat and clothing", _add_arguments, _run)
