"""The running server: this machine only, no telemetry, whatever lies in the folder it is started from."""

from __future__ import annotations

import os
import re
import socket
import subprocess
import sys
import time
import urllib.request
from collections.abc import Iterator
from pathlib import Path

import pytest

STARTS_WITHIN_S = 30.0
# A configuration that would open the server to the network, as it might lie in a working folder.
OPEN_CONFIGURATION = """[server]
address = "0.0.0.0"
allowedHosts = []
[browser]
gatherUsageStats = true
[client]
showErrorDetails = "full"
"""


def free_port() -> int:
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        return int(probe.getsockname()[1])


@pytest.fixture(scope="module")
def port(tmp_path_factory: pytest.TempPathFactory) -> Iterator[int]:
    """A real server, started in a folder with a configuration that asks for the opposite of ours."""
    folder = tmp_path_factory.mktemp("elsewhere")
    (folder / ".streamlit").mkdir()
    (folder / ".streamlit" / "config.toml").write_text(OPEN_CONFIGURATION)
    number = free_port()
    store = folder / "planner.db"
    words = [sys.executable, "-m", "planner", "--store", str(store), "--port", str(number)]
    environment = {**os.environ, "STREAMLIT_SERVER_HEADLESS": "true", "STREAMLIT_SERVER_ADDRESS": "0.0.0.0"}
    with (folder / "log").open("w") as log:
        server = subprocess.Popen(words, cwd=folder, env=environment, stdout=log, stderr=log)
    try:
        wait_for(number, server, folder / "log")
        yield number
    finally:
        server.terminate()
        server.wait(timeout=20)


def wait_for(number: int, server: subprocess.Popen[bytes], log: Path) -> None:
    end = time.monotonic() + STARTS_WITHIN_S
    while time.monotonic() < end and server.poll() is None:
        try:
            with urllib.request.urlopen(f"http://localhost:{number}/_stcore/health", timeout=2) as answer:
                if answer.status == 200:
                    return
        except OSError:
            time.sleep(0.1)
    raise AssertionError(f"the server did not answer:\n{log.read_text()}")


def connects(address: str, number: int) -> bool:
    with socket.socket() as one:
        one.settimeout(2)
        return one.connect_ex((address, number)) == 0


def stream_status(number: int, host: str) -> int:
    """Ask for the stream that carries all data, under a Host header, and return the HTTP status."""
    request = (
        f"GET /_stcore/stream HTTP/1.1\r\nHost: {host}\r\nUpgrade: websocket\r\nConnection: Upgrade\r\n"
        "Sec-WebSocket-Key: AAAAAAAAAAAAAAAAAAAAAA==\r\nSec-WebSocket-Version: 13\r\n"
        "Sec-WebSocket-Protocol: streamlit\r\n\r\n"
    )
    with socket.create_connection(("127.0.0.1", number), timeout=5) as one:
        one.sendall(request.encode())
        return int(one.recv(4096).decode(errors="replace").split()[1])


def test_only_this_machine_can_connect(port: int) -> None:
    assert connects("127.0.0.1", port)
    # Another address of this machine's own: it would connect if the server listened to all of them.
    assert not connects("127.0.0.2", port)


def test_a_foreign_host_is_refused(port: int) -> None:
    assert stream_status(port, f"localhost:{port}") == 101
    assert stream_status(port, f"127.0.0.1:{port}") == 101
    assert stream_status(port, "foreign.example") == 403


def test_the_first_page_asks_for_nothing_from_elsewhere(port: int) -> None:
    with urllib.request.urlopen(f"http://localhost:{port}/", timeout=5) as answer:
        page = answer.read().decode()
    asked_for = re.findall(r"""(?:src|href)=["']([^"']+)""", page)
    assert asked_for
    assert all(not re.match(r"(?:https?:)?//", each) for each in asked_for)
