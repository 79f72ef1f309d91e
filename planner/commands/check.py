"""`check`: is the store sound?"""

from __future__ import annotations

import argparse

from planner.commands.command import Answer, Command, opened_store

FAULTS_FOUND = 1  # exit status: the check itself worked, the store is not sound


def _add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take nothing beyond what every sub-command takes."""


def _run(arguments: argparse.Namespace) -> Answer:
    with opened_store(arguments) as store:
        faults = store.check()
        record = {"store": str(store.path), "sound": not faults, "faults": faults}
    return Answer(record, exit_status=FAULTS_FOUND if faults else 0)


COMMAND = Command("check", "check the store's integrity", _add_arguments, _run)
