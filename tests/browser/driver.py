"""A small client of the W3C WebDriver protocol: just what the page tests need.

W3C Recommendation WebDriver (2018), sections 8 (sessions), 10 (navigation), 13 (script).
"""

from __future__ import annotations

import base64
import json
import shutil
import socket
import subprocess
import time
import urllib.error
import urllib.request
from contextlib import contextmanager
from pathlib import Path

FLAGS = (
    "--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run",
    "--disable-background-networking", "--disable-component-update", "--disable-sync",
    "--hide-scrollbars",
)  # fmt: skip


def missing() -> str | None:
    """Return in a sentence which of the two programs is not here, or None."""
    for program in ("chromium", "chromedriver"):
        if shutil.which(program) is None:
            return (
                f"the page tests need {program}, which is not installed; on Debian: "
                "apt-get install chromium chromium-driver"
            )
    return None


class Browser:
    """One open browser window."""

    def __init__(self, port: int, profile: Path) -> None:
        self._base = f"http://127.0.0.1:{port}"
        wanted = {
            "browserName": "chrome",
            "goog:loggingPrefs": {"browser": "ALL"},
            "goog:chromeOptions": {
                "binary": shutil.which("chromium"),
                "args": [*FLAGS, f"--user-data-dir={profile}"],
            },
        }
        answer = self._call("POST", "/session", {"capabilities": {"alwaysMatch": wanted}})
        self._base += f"/session/{answer['sessionId']}"

    def _call(self, method: str, path: str, body: dict | None = None):
        data = None if body is None else json.dumps(body).encode()
        request = urllib.request.Request(
            self._base + path, data, {"Content-Type": "application/json"}, method=method
        )
        with urllib.request.urlopen(request, timeout=120) as answer:
            return json.load(answer)["value"]

    def open(self, path: Path) -> None:
        self._call("POST", "/url", {"url": path.as_uri()})

    def run(self, script: str, *arguments):
        return self._call("POST", "/execute/sync", {"script": script, "args": list(arguments)})

    def screen(self, width: int, height: int, mobile: bool) -> None:
        """Show the page as on a screen of this size in CSS pixels."""
        self.command("Emulation.setDeviceMetricsOverride", {
            "width": width, "height": height, "deviceScaleFactor": 1, "mobile": mobile,
        })  # fmt: skip

    def command(self, name: str, parameters: dict):
        """Send a command of the browser's own protocol."""
        return self._call("POST", "/goog/cdp/execute", {"cmd": name, "params": parameters})

    def messages(self) -> list[dict]:
        """Return what the page wrote to the browser's console since the last call."""
        return self._call("POST", "/se/log", {"type": "browser"})

    def printed(self) -> bytes:
        """Return the page as a PDF."""
        return base64.b64decode(self._call("POST", "/print", {"background": True}))

    def quit(self) -> None:
        self._call("DELETE", "")


def _free_port() -> int:
    with socket.socket() as one:
        one.bind(("127.0.0.1", 0))
        return int(one.getsockname()[1])


@contextmanager
def browser(profile: Path):
    """Yield a browser with a profile of its own; both processes end with it."""
    port = _free_port()
    process = subprocess.Popen(
        [shutil.which("chromedriver"), f"--port={port}"],
        stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL,
    )  # fmt: skip
    try:
        for _ in range(300):
            try:
                with urllib.request.urlopen(f"http://127.0.0.1:{port}/status", timeout=5):
                    break
            except (urllib.error.URLError, ConnectionError):
                time.sleep(0.1)
        window = Browser(port, profile)
        try:
            yield window
        finally:
            window.quit()
    finally:
        process.terminate()
        process.wait(timeout=30)
