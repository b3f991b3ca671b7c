"""A real browser for the tests of the HTML report, spoken to over its own debugging protocol.

Starts a Chromium that the system has, without a window and with a folder of its own, and ends it again. Installs
nothing: ``browser_found`` says what there is.
"""

from __future__ import annotations

import base64
import contextlib
import http.client
import json
import shutil
import subprocess
import time
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import websocket

_NAMES = ("chromium", "chromium-browser", "google-chrome", "google-chrome-stable")
_PATIENCE_S = 60
_MM_PER_INCH = 25.4

_OPTIONS = (
    "--headless=new",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-dev-shm-usage",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
    "--no-first-run",
    "--no-default-browser-check",
    "--remote-debugging-port=0",
    "--remote-allow-origins=*",
)


def browser_found() -> str | None:
    """The path of a browser, None where there is none."""
    return next(filter(None, map(shutil.which, _NAMES)), None)


@dataclass
class Opened:
    """What the browser did and said while it had a page open."""

    requests: list[str] = field(default_factory=list)
    complaints: list[str] = field(default_factory=list)


class Tab:
    """One page of the browser. Lengths are in millimetres of paper."""

    def __init__(self, address: str) -> None:
        self._socket = websocket.create_connection(address, timeout=_PATIENCE_S, suppress_origin=True)
        self._number = 0
        self._events: list[dict[str, Any]] = []

    def open(self, file: Path) -> Opened:
        for domain in ("Page", "Network", "Log", "Runtime"):
            self._call(f"{domain}.enable")
        self._events.clear()
        self._call("Page.navigate", url=file.as_uri())
        self._wait_for("Page.loadEventFired")
        # A round trip through the page: what it was still about to do has been told by then.
        self._call("Runtime.evaluate", expression="new Promise(done => setTimeout(done, 200))", awaitPromise=True)
        opened = Opened()
        for event in self._events:
            self._sort(event, opened)
        return opened

    def pdf(self, width_mm: float, height_mm: float) -> bytes:
        """Printed on paper that stands upright, so wide and so high; the page itself asks for it to be turned."""
        sizes = {"paperWidth": width_mm / _MM_PER_INCH, "paperHeight": height_mm / _MM_PER_INCH}
        answer = self._call("Page.printToPDF", printBackground=True, preferCSSPageSize=True, **sizes)
        return base64.b64decode(answer["data"])

    def evaluate(self, expression: str) -> Any:
        return self._call("Runtime.evaluate", expression=expression, returnByValue=True)["result"].get("value")

    def screen(self, width: int, height: int) -> bytes:
        """A PNG of the page as a screen of this width shows it."""
        self._call("Emulation.setDeviceMetricsOverride", width=width, height=height, deviceScaleFactor=1, mobile=False)
        return base64.b64decode(self._call("Page.captureScreenshot", format="png", captureBeyondViewport=True)["data"])

    def close(self) -> None:
        self._socket.close()

    def _call(self, method: str, **parameters: Any) -> dict[str, Any]:
        self._number += 1
        self._socket.send(json.dumps({"id": self._number, "method": method, "params": parameters}))
        while True:
            message = self._next()
            if message.get("id") == self._number:
                assert "error" not in message, f"{method}: {message['error']}"
                result: dict[str, Any] = message["result"]
                return result

    def _wait_for(self, method: str) -> None:
        while not any(event["method"] == method for event in self._events):
            self._next()

    def _next(self) -> dict[str, Any]:
        message: dict[str, Any] = json.loads(self._socket.recv())
        if "method" in message:
            self._events.append(message)
        return message

    @staticmethod
    def _sort(event: dict[str, Any], opened: Opened) -> None:
        told = event["params"]
        match event["method"]:
            case "Network.requestWillBeSent":
                opened.requests.append(told["request"]["url"])
            case "Log.entryAdded":
                opened.complaints.append(told["entry"]["text"])
            case "Runtime.exceptionThrown" | "Runtime.consoleAPICalled":
                opened.complaints.append(json.dumps(told))


@contextlib.contextmanager
def open_browser(program: str, folder: Path) -> Iterator[Tab]:
    """A browser with one empty page, which keeps everything it writes in ``folder``."""
    command = [program, *_OPTIONS, f"--user-data-dir={folder}", "about:blank"]
    process = subprocess.Popen(command, stdin=subprocess.DEVNULL, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
    try:
        port = _port(process, folder / "DevToolsActivePort")
        tab = Tab(_page_of(port))
        try:
            yield tab
        finally:
            tab.close()
    finally:
        process.terminate()
        try:
            process.wait(10)
        except subprocess.TimeoutExpired:
            process.kill()
            process.wait()


def _port(process: subprocess.Popen[bytes], told: Path) -> int:
    """The browser writes it into its folder as soon as it listens."""
    give_up = time.monotonic() + _PATIENCE_S
    while time.monotonic() < give_up:
        assert process.poll() is None, f"the browser has ended with status {process.returncode}"
        if told.exists() and len(words := told.read_text("utf-8").split()) == 2:
            return int(words[0])
        time.sleep(0.05)
    raise AssertionError("the browser does not answer")


def _page_of(port: int) -> str:
    """The address of the one page, asked for on the socket that lists them."""
    connection = http.client.HTTPConnection("127.0.0.1", port, timeout=_PATIENCE_S)
    try:
        connection.request("GET", "/json/list")
        pages = json.loads(connection.getresponse().read())
    finally:
        connection.close()
    return str(next(page["webSocketDebuggerUrl"] for page in pages if page["type"] == "page"))
