"""Every sub-command, in the order in which `--help` shows them: a new one is a module and a line here."""

from __future__ import annotations

from planner.commands import air, arrive, backup, check, clock, demo, drink, morning, read, sweat
from planner.commands.command import Command

COMMANDS: tuple[Command, ...] = (
    air.COMMAND,
    morning.COMMAND,
    arrive.COMMAND,
    clock.COMMAND,
    sweat.COMMAND,
    drink.COMMAND,
    read.COMMAND,
    demo.COMMAND,
    backup.COMMAND,
    check.COMMAND,
)
