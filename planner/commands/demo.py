"""`demo`: loads the invented season into an empty store."""

from __future__ import annotations

import argparse

from planner.commands.command import Answer, Command, opened_store


def _add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take nothing beyond what every sub-command takes."""


def _run(arguments: argparse.Namespace) -> Answer:
    from planner.services.importing import load_demo

    with opened_store(arguments) as store:
        load_demo(store)
        return Answer({"store": str(store.path), "loaded": "the invented demo season"})


COMMAND = Command("demo", "load the invented demo season into an empty store", _add_arguments, _run)
