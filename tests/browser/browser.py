"""A small driver of headless Chromium over its DevTools protocol: open a page, listen, ask, look, print."""

from __future__ import annotations

import base64
import json
import os
import shutil
import subprocess
import tempfile
import time
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from types import TracebackType
from typing import Any, Final, Self

import websocket

TIMEOUT: Final = 20.0  # seconds, generous: the machine may be busy
_NAMES: Final = ("chromium", "chromium-browser", "google-chrome")
_SWITCHES: Final = (
    "--headless=new",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-default-apps",
    "--disable-sync",
    "--disable-dev-shm-usage",
    "--no-first-run",
    "--hide-scrollbars",
    "--metrics-recording-only",
    "--mute-audio",
    "--remote-debugging-port=0",
    "--remote-allow-origins=*",
)


class BrowserError(Exception):
    """The browser did not do what was asked of it, or not in time."""


def find_chromium() -> str | None:
    """Return the path of a Chromium: the CHROMIUM variable's, else one on PATH."""
    named = os.environ.get("CHROMIUM")
    if named:
        return shutil.which(named)
    return next((found for name in _NAMES if (found := shutil.which(name))), None)


@dataclass(slots=True)
class Page:
    """One tab: what it said and asked for since it was opened."""

    browser: Browser
    session: str
    target: str
    console: list[str] = field(default_factory=list)  # messages of any level, with their level
    exceptions: list[str] = field(default_factory=list)
    requests: list[str] = field(default_factory=list)  # addresses asked for, the page itself included
    failed: list[str] = field(default_factory=list)
    loaded: bool = False

    def call(self, method: str, **parameters: Any) -> dict[str, Any]:
        """Send a command of the protocol and return its result."""
        return self.browser.call(method, self.session, **parameters)

    def open(self, path: Path | str, *, fragment: str = "") -> None:
        """Open a file and wait until it and what it names are loaded."""
        # From a page to a fragment of itself nothing is loaded, so leave it first.
        self._go("about:blank")
        for told in (self.console, self.exceptions, self.requests, self.failed):
            told.clear()
        address = path if isinstance(path, str) else path.resolve().as_uri()
        self._go(address + fragment)

    def _go(self, address: str) -> None:
        self.loaded = False
        self.call("Page.navigate", url=address)
        self.browser.listen_until(lambda: self.loaded, f"{address} to load")

    def evaluate(self, expression: str) -> Any:
        """Return the value of an expression, awaited when it is a promise."""
        answer = self.call("Runtime.evaluate", expression=expression, returnByValue=True, awaitPromise=True)
        if "exceptionDetails" in answer:
            details = answer["exceptionDetails"]
            raise BrowserError(details.get("exception", {}).get("description", details["text"]))
        return answer["result"].get("value")

    def wait_for(self, expression: str, *, timeout: float = TIMEOUT) -> Any:
        """Wait until an expression is truthy, and return its value."""
        end = time.monotonic() + timeout
        while not (value := self.evaluate(expression)):
            if time.monotonic() > end:
                raise BrowserError(
                    f"waited in vain for {expression}; console: {self.console}; exceptions: {self.exceptions}"
                )
            time.sleep(0.02)
        return value

    def size(self, width: int, height: int) -> None:
        """Set the size of the window's inside, in pixels."""
        self.call(
            "Emulation.setDeviceMetricsOverride",
            width=width,
            height=height,
            deviceScaleFactor=1,
            mobile=False,
        )

    def prefer(self, scheme: str, *, medium: str = "") -> None:
        """Let the reader prefer `light` or `dark`; `medium` may be `print`."""
        self.call(
            "Emulation.setEmulatedMedia",
            media=medium,
            features=[{"name": "prefers-color-scheme", "value": scheme}],
        )

    def screenshot(self, path: Path, *, whole: bool = True) -> None:
        """Write a PNG of the whole page, or of what the window shows."""
        shot = self.call("Page.captureScreenshot", format="png", captureBeyondViewport=whole)
        path.write_bytes(base64.b64decode(shot["data"]))

    def pdf(self, path: Path) -> None:
        """Print the page to a PDF on upright A4."""
        sheet = self.call("Page.printToPDF", paperWidth=8.27, paperHeight=11.69, printBackground=False)
        path.write_bytes(base64.b64decode(sheet["data"]))

    def move_to(self, x: float, y: float) -> None:
        """Move the pointer."""
        self.call("Input.dispatchMouseEvent", type="mouseMoved", x=x, y=y)

    def press(self, key: str, *, text: str = "") -> None:
        """Press and release a key, by its name as in KeyboardEvent.key."""
        down = {"type": "keyDown" if text else "rawKeyDown", "key": key, "text": text}
        codes = {
            "Enter": 13,
            "Escape": 27,
            "End": 35,
            "Home": 36,
            "ArrowLeft": 37,
            "ArrowRight": 39,
            "Tab": 9,
        }
        self.call("Input.dispatchKeyEvent", **down, windowsVirtualKeyCode=codes.get(key, 0))
        self.call("Input.dispatchKeyEvent", type="keyUp", key=key, windowsVirtualKeyCode=codes.get(key, 0))

    def close(self) -> None:
        """Close the tab."""
        self.browser.call("Target.closeTarget", None, targetId=self.target)
        self.browser.pages.pop(self.session, None)


class Browser:
    """One Chromium with a fresh profile, ended and its profile removed on leaving."""

    def __init__(self, chromium: str) -> None:
        self._folder = tempfile.TemporaryDirectory(prefix="browser-", ignore_cleanup_errors=True)
        self._process = subprocess.Popen(
            [chromium, *_SWITCHES, f"--user-data-dir={self._folder.name}", "about:blank"],
            stdin=subprocess.DEVNULL,
            stdout=subprocess.DEVNULL,
            stderr=subprocess.DEVNULL,
        )
        self._last = 0
        self.pages: dict[str, Page] = {}
        try:
            self._socket = websocket.create_connection(self._address(), timeout=TIMEOUT, suppress_origin=True)
        except BaseException:
            self._end()
            raise

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()

    def page(self, *, width: int = 1440, height: int = 1000, scheme: str = "light") -> Page:
        """Return a new, listening tab."""
        target = self.call("Target.createTarget", None, url="about:blank")["targetId"]
        session = self.call("Target.attachToTarget", None, targetId=target, flatten=True)["sessionId"]
        page = Page(browser=self, session=session, target=target)
        self.pages[session] = page
        for domain in ("Page", "Runtime", "Network", "Log"):
            page.call(f"{domain}.enable")
        page.size(width, height)
        page.prefer(scheme)
        return page

    def call(self, method: str, session: str | None, **parameters: Any) -> dict[str, Any]:
        """Send a command and return its result, taking note of what pages say meanwhile."""
        self._last += 1
        number = self._last
        message: dict[str, Any] = {"id": number, "method": method, "params": parameters}
        if session is not None:
            message["sessionId"] = session
        self._socket.send(json.dumps(message))
        while True:
            answer = self._receive(TIMEOUT)
            if answer is None:
                raise BrowserError(f"no answer to {method}")
            if answer.get("id") == number:
                if "error" in answer:
                    raise BrowserError(f"{method}: {answer['error']['message']}")
                result: dict[str, Any] = answer["result"]
                return result

    def listen_until(self, condition: Any, what: str) -> None:
        """Listen until a condition holds."""
        end = time.monotonic() + TIMEOUT
        while not condition():
            if time.monotonic() > end:
                raise BrowserError(f"waited in vain for {what}")
            self._receive(0.1)

    def close(self) -> None:
        """End the browser and remove its profile."""
        try:
            self.call("Browser.close", None)
            self._process.wait(timeout=TIMEOUT)
        except (BrowserError, OSError, websocket.WebSocketException, subprocess.TimeoutExpired):
            pass
        self._socket.close()
        self._end()

    def _end(self) -> None:
        if self._process.poll() is None:
            self._process.kill()
            self._process.wait()
        self._folder.cleanup()

    def _address(self) -> str:
        """Return the address that the browser writes into its profile once it listens."""
        port_file = Path(self._folder.name) / "DevToolsActivePort"
        end = time.monotonic() + 2 * TIMEOUT
        while time.monotonic() < end:
            lines = port_file.read_text(encoding="ascii").splitlines() if port_file.is_file() else []
            if len(lines) == 2:
                return f"ws://127.0.0.1:{lines[0]}{lines[1]}"
            if self._process.poll() is not None:
                raise BrowserError(f"the browser ended at once, with {self._process.returncode}")
            time.sleep(0.02)
        raise BrowserError("the browser did not start listening")

    def _receive(self, timeout: float) -> dict[str, Any] | None:
        self._socket.settimeout(timeout)
        try:
            message: dict[str, Any] = json.loads(self._socket.recv())
        except websocket.WebSocketTimeoutException:
            return None
        if "method" in message:
            page = self.pages.get(message.get("sessionId", ""))
            if page is not None:
                _note(page, message["method"], message["params"])
        return message


def _note(page: Page, method: str, told: Mapping[str, Any]) -> None:
    if method == "Page.loadEventFired":
        page.loaded = True
    elif method == "Runtime.consoleAPICalled":
        page.console.append(
            f"{told['type']}: "
            + " ".join(str(a.get("value", a.get("description", ""))) for a in told["args"])
        )
    elif method == "Runtime.exceptionThrown":
        details = told["exceptionDetails"]
        page.exceptions.append(details.get("exception", {}).get("description", details["text"]))
    elif method == "Log.entryAdded":
        page.console.append(f"{told['entry']['level']}: {told['entry']['text']}")
    elif method == "Network.requestWillBeSent":
        page.requests.append(told["request"]["url"])
    elif method == "Network.loadingFailed":
        page.failed.append(told.get("errorText", ""))
