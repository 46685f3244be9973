"""A Chromium for tests, spoken to over its debugging pipe: NUL-ended JSON on two file descriptors, so nothing but the
standard library is needed."""

import base64
import fcntl
import json
import os
import select
import shutil
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

PROGRAM = next(filter(None, map(shutil.which, ("chromium", "chromium-browser", "google-chrome"))), None)
PATIENCE = 90.0
"""Seconds after which an answer never comes."""
_BEGIN = (
    "import os, sys; os.dup2(int(sys.argv[1]), 3); os.dup2(int(sys.argv[2]), 4); os.execv(sys.argv[3], sys.argv[3:])"
)
_FLAGS = ("--headless=new", "--no-sandbox", "--disable-dev-shm-usage", "--disable-gpu", "--remote-debugging-pipe")


def _above(fd: int) -> int:
    """The same end of a pipe under a number that is not taken by what the child will put at 3 and 4."""
    moved = fcntl.fcntl(fd, fcntl.F_DUPFD, 10)
    os.close(fd)
    return moved


class Browser:
    """One browser with one page; used with `with`, which ends it."""

    def __init__(self, profile: Path, width: int = 1200, height: int = 900) -> None:
        theirs_in, self._out = map(_above, os.pipe())
        self._in, theirs_out = map(_above, os.pipe())
        assert PROGRAM is not None
        call = [sys.executable, "-c", _BEGIN, str(theirs_in), str(theirs_out), PROGRAM, *_FLAGS]
        quiet = subprocess.DEVNULL
        self._process = subprocess.Popen(
            [*call, f"--user-data-dir={profile}"],
            pass_fds=(theirs_in, theirs_out),
            stdin=quiet,
            stdout=quiet,
            stderr=quiet,
        )
        os.close(theirs_in)
        os.close(theirs_out)
        self._number, self._rest, self._session = 0, b"", ""
        self.events: list[dict[str, Any]] = []
        target = self._call("Target.createTarget", url="about:blank")["targetId"]
        self._session = self._call("Target.attachToTarget", targetId=target, flatten=True)["sessionId"]
        for domain in ("Page", "Runtime", "Log", "Network"):
            self._call(f"{domain}.enable")
        self.sized(width, height)

    def __enter__(self) -> "Browser":
        return self

    def __exit__(self, *_: object) -> None:
        self._process.kill()
        self._process.wait(PATIENCE)
        os.close(self._in)
        os.close(self._out)

    # Messages

    def _call(self, method: str, **params: Any) -> dict[str, Any]:
        self._number += 1
        session = {"sessionId": self._session} if self._session else {}
        os.write(
            self._out, json.dumps({"id": self._number, "method": method, "params": params, **session}).encode() + b"\0"
        )
        while (message := self._next()).get("id") != self._number:
            self.events.append(message)
        assert "error" not in message, message
        result: dict[str, Any] = message["result"]
        return result

    def _next(self) -> dict[str, Any]:
        end = time.monotonic() + PATIENCE
        while b"\0" not in self._rest:
            assert time.monotonic() < end, "the browser says nothing"
            if select.select([self._in], [], [], 1.0)[0]:
                data = os.read(self._in, 1 << 16)
                assert data, "the browser has ended"
                self._rest += data
        head, _, self._rest = self._rest.partition(b"\0")
        message: dict[str, Any] = json.loads(head)
        return message

    # Pages

    def sized(self, width: int, height: int) -> None:
        """Give the window a size."""
        self._call("Emulation.setDeviceMetricsOverride", width=width, height=height, deviceScaleFactor=1, mobile=False)

    def like(self, dark: bool = False, printed: bool = False) -> None:
        """What the reader prefers: a dark page, or one on paper."""
        scheme = {"name": "prefers-color-scheme", "value": "dark" if dark else "light"}
        self._call("Emulation.setEmulatedMedia", media="print" if printed else "", features=[scheme])

    def open(self, uri: str) -> None:
        """Open a page, and wait until it is there."""
        self.events.clear()
        self._call("Page.navigate", url=uri)
        while not any(one.get("method") == "Page.loadEventFired" for one in self.events):
            self.events.append(self._next())

    def ask(self, expression: str) -> Any:
        """The value of an expression in the page."""
        answer = self._call("Runtime.evaluate", expression=expression, returnByValue=True)
        assert "exceptionDetails" not in answer, answer
        return answer["result"].get("value")

    def complaints(self) -> list[str]:
        """What stands in the log of the page since it was opened: errors, warnings, exceptions."""
        self.ask("1")
        kinds = ("Log.entryAdded", "Runtime.exceptionThrown", "Runtime.consoleAPICalled")
        return [json.dumps(one["params"]) for one in self.events if one.get("method") in kinds]

    def requests(self) -> list[str]:
        """The addresses that the page asked for since it was opened, its own too."""
        self.ask("1")
        sent = (
            one["params"]["request"]["url"] for one in self.events if one.get("method") == "Network.requestWillBeSent"
        )
        return [url for url in sent if not url.startswith("data:")]

    def shot(self, path: Path) -> None:
        """Take a picture of the whole page, as PNG."""
        size = self._call("Page.getLayoutMetrics")["cssContentSize"]
        clip = {"x": 0, "y": 0, "width": size["width"], "height": size["height"], "scale": 1}
        data = self._call("Page.captureScreenshot", format="png", captureBeyondViewport=True, clip=clip)["data"]
        path.write_bytes(base64.b64decode(data))

    def paper(self) -> bytes:
        """The page printed, as PDF."""
        return base64.b64decode(
            self._call("Page.printToPDF", printBackground=False, paperWidth=8.27, paperHeight=11.69)["data"]
        )
