"""The command line: `python -m planner` opens the app, its sub-commands answer in a table or in JSON."""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import NoReturn

from planner import __version__
from planner.commands.command import Answer, Command
from planner.commands.printing import as_json, as_text
from planner.commands.registry import COMMANDS
from planner.errors import PlannerError
from planner.ui.server import DEFAULT_PORT, start

WRONG_INPUT = 2


class _OneLineParser(argparse.ArgumentParser):
    """A parser whose errors are one line, without the usage in front of it."""

    def error(self, message: str) -> NoReturn:
        self.exit(WRONG_INPUT, f"{self.prog}: {' '.join(message.split())}\n")


def _port(text: str) -> int:
    if not text.isdecimal() or not 1024 <= int(text) <= 65535:
        raise argparse.ArgumentTypeError(f"{text!r} cannot be used, expected a port from 1024 to 65535")
    return int(text)


def _parser() -> argparse.ArgumentParser:
    parser = _OneLineParser(
        prog="planner",
        description="Brings racing drivers through rounds that lie high. Without a command the app opens.",
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="version", version=f"planner {__version__}")
    parser.add_argument("--store", metavar="PATH", type=Path, help="the database file (or PLANNER_STORE)")
    parser.add_argument(
        "--port", type=_port, default=DEFAULT_PORT, help=f"the app's port (default {DEFAULT_PORT})"
    )
    parser.set_defaults(command=None)
    words = parser.add_subparsers(metavar="COMMAND", title="commands")
    for command in COMMANDS:
        sub = words.add_parser(
            command.name, help=command.summary, description=command.summary, allow_abbrev=False
        )
        command.add_arguments(sub)
        sub.add_argument("--json", action="store_true", help="print JSON")
        # SUPPRESS: when left out here, the value given before the command stands.
        sub.add_argument(
            "--store", metavar="PATH", type=Path, default=argparse.SUPPRESS, help="the database file"
        )
        sub.set_defaults(command=command)
    return parser


def _answer(command: Command, arguments: argparse.Namespace) -> int:
    answer: Answer = command.run(arguments)
    print(as_json(answer) if arguments.json else as_text(answer))
    return answer.exit_status


def main(argv: Sequence[str] | None = None) -> int:
    """Run the command line and return its exit status: 0 done, 1 a check found faults, 2 wrong input."""
    try:
        arguments = _parser().parse_args(argv)
        if arguments.command is None:
            return start(arguments.store, arguments.port)
        status = _answer(arguments.command, arguments)
        sys.stdout.flush()
        return status
    except BrokenPipeError:
        # The reader (head, less) has seen enough; keep the interpreter from complaining at its exit.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0
    except KeyboardInterrupt:
        return 130
    except (PlannerError, OSError) as error:
        return _refuse(str(error))
    except Exception as error:
        # A fault of ours. The user gets one line all the same; what it was stands in it.
        return _refuse(f"a fault in the program ({type(error).__name__}: {error})")


def _refuse(message: str) -> int:
    print(f"planner: {' '.join(message.split())}", file=sys.stderr)
    return WRONG_INPUT


if __name__ == "__main__":
    sys.exit(main())
