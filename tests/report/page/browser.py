"""A headless Chromium spoken to through its own debugging pipe: nothing but the standard library."""

from __future__ import annotations

import fcntl
import json
import os
import shutil
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

NAMES = ("chromium", "chromium-browser", "google-chrome", "chrome")
OPTIONS = (
    "--headless=new", "--disable-gpu", "--no-first-run", "--disable-extensions", "--hide-scrollbars",
    "--disable-background-networking", "--disable-component-update", "--disable-sync",
    "--disable-dev-shm-usage", "--remote-debugging-pipe",
)  # fmt: skip
WRAPPER = (
    "import os, sys; a, b = map(int, sys.argv[1:3]); os.dup2(a, 3); os.dup2(b, 4); "
    "os.execv(sys.argv[3], sys.argv[3:])"
)
PATIENCE = 60.0
HIGH = 10


def browser_path() -> str | None:
    """An installed Chromium or relative; None where there is none."""
    return next((found for name in NAMES if (found := shutil.which(name))), None)


class Browser:
    """One page; what it logs, throws and asks for is kept in `complaints` and `requests`."""

    def __init__(self, path: str):
        self.folder = tempfile.mkdtemp(prefix="page-test-")
        ours_in, theirs_out = map(_high, os.pipe())
        theirs_in, ours_out = map(_high, os.pipe())
        root = ["--no-sandbox"] if os.geteuid() == 0 else []
        command = [path, *OPTIONS, *root, f"--user-data-dir={self.folder}", "about:blank"]
        self.process = subprocess.Popen(
            [sys.executable, "-c", WRAPPER, str(theirs_in), str(theirs_out), *command],
            pass_fds=(theirs_in, theirs_out),
            stdout=subprocess.DEVNULL,
            stderr=subprocess.DEVNULL,
        )
        os.close(theirs_in)
        os.close(theirs_out)
        self.reading = os.fdopen(ours_in, "rb", buffering=0)
        self.writing = os.fdopen(ours_out, "wb", buffering=0)
        self.rest, self.number, self.session = b"", 0, ""
        self.complaints: list[str] = []
        self.requests: list[str] = []
        self.loaded = False
        self._attach()

    def _attach(self) -> None:
        targets = self.ask("Target.getTargets")["targetInfos"]
        target = next(one["targetId"] for one in targets if one["type"] == "page")
        self.session = self.ask("Target.attachToTarget", targetId=target, flatten=True)["sessionId"]
        for domain in ("Page", "Runtime", "Log", "Network"):
            self.ask(f"{domain}.enable")

    def ask(self, method: str, **parameters: Any) -> dict[str, Any]:
        """The answer to one request of the protocol; events that come before it are noted."""
        self.number += 1
        message: dict[str, Any] = {"id": self.number, "method": method, "params": parameters}
        if self.session:
            message["sessionId"] = self.session
        self.writing.write(json.dumps(message).encode() + b"\0")
        while True:
            answer = self._next()
            if answer.get("id") == self.number:
                assert "error" not in answer, f"{method}: {answer['error']}"
                result: dict[str, Any] = answer["result"]
                return result

    def _next(self) -> dict[str, Any]:
        while b"\0" not in self.rest:
            part = self.reading.read(65536)
            assert part, "the browser has gone"
            self.rest += part
        text, _, self.rest = self.rest.partition(b"\0")
        message: dict[str, Any] = json.loads(text)
        self._note(message.get("method", ""), message.get("params", {}))
        return message

    def _note(self, event: str, content: dict[str, Any]) -> None:
        if event == "Runtime.exceptionThrown":
            self.complaints.append(json.dumps(content["exceptionDetails"]))
        elif event == "Log.entryAdded":
            self.complaints.append(content["entry"]["text"])
        elif event == "Runtime.consoleAPICalled":
            self.complaints.append(json.dumps(content["args"]))
        elif event == "Network.requestWillBeSent":
            self.requests.append(content["request"]["url"])
        elif event == "Page.loadEventFired":
            self.loaded = True

    def open(self, file: Path, width: int = 1280, height: int = 900) -> None:
        """Open a file from disk in a window of some size and wait until it is loaded."""
        self.complaints, self.requests, self.loaded = [], [], False
        size = {"width": width, "height": height, "deviceScaleFactor": 1, "mobile": width < 700}
        self.ask("Emulation.setDeviceMetricsOverride", **size)
        self.ask("Page.navigate", url=file.as_uri())
        self.until(lambda: self.loaded)

    def until(self, there: Callable[[], bool]) -> None:
        """Go on answering until something is there; fails after a minute."""
        end = time.monotonic() + PATIENCE
        while not there():
            assert time.monotonic() < end, "waited in vain"
            self.ask("Runtime.evaluate", expression="1")

    def js(self, expression: str) -> Any:
        """The value of an expression in the page."""
        answer = self.ask("Runtime.evaluate", expression=expression, returnByValue=True)
        assert "exceptionDetails" not in answer, answer
        return answer["result"].get("value")

    def point(self, selector: str, across: float, down: float) -> None:
        """Move the pointer to a part of an element's box."""
        self.js(f"document.querySelector({selector!r}).scrollIntoView({{block: 'center'}})")
        box = self.box(selector)
        x, y = box[0] + across * box[2], box[1] + down * box[3]
        self.ask("Input.dispatchMouseEvent", type="mouseMoved", x=x, y=y)

    def box(self, selector: str) -> list[float]:
        """Left, top, width and height of an element in the window."""
        box = f"document.querySelector({selector!r}).getBoundingClientRect()"
        found: list[float] = self.js(f"[{box}.left, {box}.top, {box}.width, {box}.height]")
        return found

    def click(self, selector: str) -> None:
        """Press and let go of the pointer on an element."""
        self.point(selector, 0.5, 0.5)
        left, top, width, height = self.box(selector)
        at = {"x": left + width / 2, "y": top + height / 2}
        for kind in ("mousePressed", "mouseReleased"):
            self.ask("Input.dispatchMouseEvent", type=kind, button="left", clickCount=1, **at)

    def press(self, key: str, code: int = 0) -> None:
        """Press a key where the focus is."""
        for kind in ("keyDown", "keyUp"):
            self.ask("Input.dispatchKeyEvent", type=kind, key=key, code=key, windowsVirtualKeyCode=code)

    def close(self) -> None:
        """End the browser and take its folder away."""
        self.session = ""
        try:
            self.ask("Browser.close")
            self.process.wait(timeout=20)
        except (AssertionError, OSError, subprocess.TimeoutExpired):
            self.process.kill()
            self.process.wait()
        self.reading.close()
        self.writing.close()
        shutil.rmtree(self.folder, ignore_errors=True)


def _high(descriptor: int) -> int:
    """The same pipe under a number beyond 3 and 4, which the browser takes for its own."""
    moved = fcntl.fcntl(descriptor, fcntl.F_DUPFD_CLOEXEC, HIGH)
    os.close(descriptor)
    return moved
