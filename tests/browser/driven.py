"""A headless Chromium told what to do through a pair of pipes; no port, no network.

Keys and clicks go in as the browser's own input events, so that what a test does is what a
reader's hands do.
"""

from __future__ import annotations

import base64
import fcntl
import json
import os
import select
import signal
import time
from pathlib import Path
from typing import Any

KEYS = {
    "Tab": ("Tab", 9, ""),
    "Space": (" ", 32, " "),
    "Enter": ("Enter", 13, "\r"),
    "ArrowRight": ("ArrowRight", 39, ""),
    "ArrowLeft": ("ArrowLeft", 37, ""),
}
# Seconds: a page is drawn in one or two; a machine under load may need many more.
PATIENCE = 90.0


class Browser:
    """One browser with one page; use as a context, leaving it ends the process."""

    def __init__(self, chromium: str, profile: Path) -> None:
        theirs_in, ours_out = os.pipe()
        ours_in, theirs_out = os.pipe()
        # The browser reads commands from descriptor 3 and writes answers to descriptor 4; the
        # pipes are moved out of the way of these numbers first.
        reads = fcntl.fcntl(theirs_in, fcntl.F_DUPFD_CLOEXEC, 10)
        writes = fcntl.fcntl(theirs_out, fcntl.F_DUPFD_CLOEXEC, 10)
        command = [
            chromium, "--headless", "--no-sandbox", "--disable-gpu", "--disable-quic",
            "--no-first-run", "--disable-background-networking", "--disable-component-update",
            "--disable-sync", "--remote-debugging-pipe", f"--user-data-dir={profile}",
            "about:blank",
        ]  # fmt: skip
        self.process = os.posix_spawn(
            chromium,
            command,
            os.environ,
            file_actions=[
                (os.POSIX_SPAWN_OPEN, 1, os.devnull, os.O_WRONLY, 0),
                (os.POSIX_SPAWN_OPEN, 2, os.devnull, os.O_WRONLY, 0),
                (os.POSIX_SPAWN_DUP2, reads, 3),
                (os.POSIX_SPAWN_DUP2, writes, 4),
            ],
        )
        for end in (theirs_in, theirs_out, reads, writes):
            os.close(end)
        self._in, self._out, self._rest = ours_in, ours_out, b""
        self._number = 0
        self.events: list[dict[str, Any]] = []
        targets = self.call("Target.getTargets", session=None)["targetInfos"]
        page = next(one["targetId"] for one in targets if one["type"] == "page")
        self.session: str | None = None
        attached = self.call("Target.attachToTarget", targetId=page, flatten=True)
        self.session = attached["sessionId"]
        for domain in ("Page", "Runtime", "Log", "Network"):
            self.call(f"{domain}.enable")

    def __enter__(self) -> Browser:
        return self

    def __exit__(self, *error: object) -> None:
        os.kill(self.process, signal.SIGKILL)
        os.waitpid(self.process, 0)
        os.close(self._in)
        os.close(self._out)

    def _message(self, until: float) -> dict[str, Any]:
        """Read one message; the browser ends each with a zero byte."""
        while b"\0" not in self._rest:
            ready, _, _ = select.select([self._in], [], [], max(0.0, until - time.monotonic()))
            if not ready:
                raise TimeoutError("the browser does not answer")
            read = os.read(self._in, 1 << 16)
            if not read:
                raise ConnectionError("the browser has ended")
            self._rest += read
        text, _, self._rest = self._rest.partition(b"\0")
        message: dict[str, Any] = json.loads(text)
        return message

    def call(self, method: str, /, session: str | None = "own", **params: Any) -> dict[str, Any]:
        """Send one command and return its result; what happens meanwhile goes to ``events``."""
        self._number += 1
        own = getattr(self, "session", None) if session == "own" else session
        message = {"id": self._number, "method": method, "params": params}
        if own:
            message["sessionId"] = own
        os.write(self._out, json.dumps(message).encode() + b"\0")
        until = time.monotonic() + PATIENCE
        while True:
            answer = self._message(until)
            if answer.get("id") == self._number:
                if "error" in answer:
                    raise RuntimeError(f"{method}: {answer['error']}")
                result: dict[str, Any] = answer["result"]
                return result
            self.events.append(answer)

    def run(self, script: str) -> Any:
        """Return the value of a script's expression."""
        found = self.call("Runtime.evaluate", expression=script, returnByValue=True)
        if "exceptionDetails" in found:
            raise RuntimeError(found["exceptionDetails"])
        return found["result"].get("value")

    def wait(self, condition: str) -> None:
        """Wait until a script's expression is true."""
        until = time.monotonic() + PATIENCE
        while not self.run(condition):
            if time.monotonic() > until:
                raise TimeoutError(condition)
            time.sleep(0.05)

    def show(self, address: str, ready: str, width: int = 1280, height: int = 1400) -> None:
        """Open an address afresh and wait until it is ready."""
        self.call("Emulation.setDeviceMetricsOverride", width=width, height=height,
                  deviceScaleFactor=1, mobile=False)  # fmt: skip
        self.call("Page.navigate", url="about:blank")
        self.wait("location.href === 'about:blank'")
        self.events.clear()
        self.call("Page.navigate", url=address)
        self.wait(f"document.readyState === 'complete' && {ready}")

    def click(self, element: str) -> None:
        """Click the middle of the element that a script's expression gives."""
        place = self.run(
            f"(function () {{ var e = {element}; e.scrollIntoView({{block: 'center'}}); "
            "var b = e.getBoundingClientRect(); "
            "return [b.x + b.width / 2, b.y + b.height / 2]; })()"
        )
        for kind in ("mousePressed", "mouseReleased"):
            self.call("Input.dispatchMouseEvent", type=kind, x=place[0], y=place[1],
                      button="left", clickCount=1)  # fmt: skip

    def press(self, key: str, times: int = 1, shift: bool = False) -> None:
        """Press a key."""
        name, code, text = KEYS[key]
        for _ in range(times):
            for kind in ("keyDown", "keyUp"):
                own = {"text": text} if text and kind == "keyDown" else {}
                self.call(
                    "Input.dispatchKeyEvent", type=kind, key=name, code=key,
                    windowsVirtualKeyCode=code, modifiers=8 if shift else 0, **own,
                )  # fmt: skip

    def picture(self, path: Path) -> None:
        """Write what the window shows as a PNG."""
        path.write_bytes(base64.b64decode(self.call("Page.captureScreenshot")["data"]))

    def printed(self) -> bytes:
        """Return the page as a PDF, as its print style lays it out."""
        made = self.call("Page.printToPDF", preferCSSPageSize=True)
        return base64.b64decode(made["data"])

    def faults(self) -> list[str]:
        """Return what the page wrote to the console as a warning or an error, or threw."""
        found = []
        for event in self.events:
            params = event.get("params", {})
            if event.get("method") == "Runtime.exceptionThrown":
                found.append(json.dumps(params["exceptionDetails"]))
            elif event.get("method") == "Log.entryAdded" and params["entry"]["level"] != "verbose":
                found.append(params["entry"]["text"])
            elif event.get("method") == "Runtime.consoleAPICalled":
                found.append(json.dumps(params["args"]))
        return found

    def requests(self) -> list[str]:
        """Return every address that the page asked for."""
        return [
            event["params"]["request"]["url"]
            for event in self.events
            if event.get("method") == "Network.requestWillBeSent"
        ]
