"""Starts the app: Streamlit's own server, bound to this machine only."""

from __future__ import annotations

import os
import socket
import sys
import tomllib
from pathlib import Path

from planner.errors import InputError

PACKAGE = Path(__file__).resolve().parents[1]
DEFAULT_PORT = 8501
# Who may reach the server and what leaves it. The rest of the file is looks: the file itself is enough there.
SAFEGUARDED = ("server", "browser", "client")


def settings_as_flags(config: Path) -> list[str]:
    """Return the settings in `SAFEGUARDED` of a Streamlit configuration file as command-line flags.

    Flags win over every configuration file and environment variable, so a file that lies in the
    working folder or in the user's home can neither open the server to the network nor switch
    telemetry on.
    """
    flags: list[str] = []
    settings = tomllib.loads(config.read_text(encoding="utf-8"))
    for section in SAFEGUARDED:
        for key, value in settings[section].items():
            for each in value if isinstance(value, list) else [value]:
                text = str(each).lower() if isinstance(each, bool) else str(each)
                flags += [f"--{section}.{key}", text]
    return flags


def start(store: Path | None, port: int) -> int:
    """Run the app until it is stopped, and return its exit status.

    Parameters: `store` is the database file (None: the user's data folder, or PLANNER_STORE);
    `port` is where it answers on this machine.
    Raises: InputError when another program answers on that port.
    """
    # Imported here: a sub-command needs neither the server nor the database to print its help.
    from streamlit.web import cli

    from planner.services.workspace import STORE_VARIABLE

    _refuse_taken_port(port)
    if store is not None:
        os.environ[STORE_VARIABLE] = str(store.resolve())
    flags = settings_as_flags(PACKAGE / ".streamlit" / "config.toml")
    sys.argv = ["streamlit", "run", str(PACKAGE / "app.py"), *flags, "--server.port", str(port)]
    try:
        cli.main()
    except SystemExit as stopped:
        return stopped.code if isinstance(stopped.code, int) else 0
    return 0


def _refuse_taken_port(port: int) -> None:
    with socket.socket() as probe:
        # As the server itself does, so that a port whose last connections are still closing is free.
        probe.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
        try:
            probe.bind(("localhost", port))
        except OSError:
            raise InputError("port", port, "a port that no other program uses") from None
