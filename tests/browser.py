"""A headless Chromium driven over its debugging pipe, for tests that need a real page."""

from __future__ import annotations

import json
import os
import select
import shutil
import subprocess
import time
from pathlib import Path
from typing import Any

FLAGS = (
    "--headless",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
    "--hide-scrollbars",
    "--remote-debugging-pipe",
)


def program() -> str | None:
    """Path of a Chromium, None where there is none."""
    return next((path for name in ("chromium", "chromium-browser") if (path := shutil.which(name))), None)


class Browser:
    """One browser with one page; every event is kept."""

    def __init__(self, folder: Path) -> None:
        to_child, self._write = os.pipe()
        self._read, from_child = os.pipe()

        def wire() -> None:
            # The browser reads commands on descriptor 3 and answers on 4.
            first, second = os.dup(to_child), os.dup(from_child)
            os.dup2(first, 3)
            os.dup2(second, 4)

        chromium = program()
        assert chromium is not None
        self._process = subprocess.Popen(
            [chromium, *FLAGS, f"--user-data-dir={folder}"],
            pass_fds=(3, 4, to_child, from_child),
            preexec_fn=wire,
            stdout=subprocess.DEVNULL,
            stderr=subprocess.DEVNULL,
        )
        os.close(to_child)
        os.close(from_child)
        self._buffer = b""
        self._number = 0
        self._session = ""
        self.events: list[dict[str, Any]] = []
        target = self.call("Target.createTarget", url="about:blank")["targetId"]
        self._session = self.call("Target.attachToTarget", targetId=target, flatten=True)["sessionId"]
        for domain in ("Page", "Runtime", "Log", "Network"):
            self.call(f"{domain}.enable")

    def close(self) -> None:
        """End this browser and no other."""
        self._process.kill()
        self._process.wait()
        os.close(self._write)
        os.close(self._read)

    def call(self, method: str, **parameters: Any) -> dict[str, Any]:
        """Send a command and wait for its result."""
        self._number += 1
        message: dict[str, Any] = {"id": self._number, "method": method, "params": parameters}
        if self._session:
            message["sessionId"] = self._session
        os.write(self._write, json.dumps(message).encode() + b"\0")
        while True:
            answer = self._next()
            if answer.get("id") == self._number:
                assert "error" not in answer, answer
                return dict(answer["result"])
            self.events.append(answer)

    def _next(self, patience_s: float = 30.0) -> dict[str, Any]:
        end = time.monotonic() + patience_s
        while b"\0" not in self._buffer:
            ready, _, _ = select.select([self._read], [], [], max(0.0, end - time.monotonic()))
            assert ready, "the browser does not answer"
            self._buffer += os.read(self._read, 1 << 20)
        message, self._buffer = self._buffer.split(b"\0", 1)
        return dict(json.loads(message))

    def show(self, path: Path, *, width: int, dark: bool = False) -> None:
        """Load a file at a width of the window [px] and wait until it is there."""
        self.events.clear()
        self.call("Emulation.setDeviceMetricsOverride", width=width, height=800, deviceScaleFactor=1, mobile=False)
        scheme = {"name": "prefers-color-scheme", "value": "dark" if dark else "light"}
        self.call("Emulation.setEmulatedMedia", features=[scheme])
        self.call("Page.navigate", url=path.as_uri())
        end = time.monotonic() + 30
        while not any(e.get("method") == "Page.loadEventFired" for e in self.events):
            assert time.monotonic() < end
            self.events.append(self._next())

    def evaluate(self, expression: str) -> Any:
        """Value of an expression in the page."""
        result = self.call("Runtime.evaluate", expression=expression, returnByValue=True)
        assert "exceptionDetails" not in result, result
        return result["result"].get("value")

    def complaints(self) -> list[str]:
        """Console messages and exceptions since the page was loaded."""
        wanted = ("Log.entryAdded", "Runtime.exceptionThrown", "Runtime.consoleAPICalled")
        return [json.dumps(e["params"]) for e in self.events if e.get("method") in wanted]

    def requests(self) -> list[str]:
        """Addresses the page asked for."""
        return [e["params"]["request"]["url"] for e in self.events if e.get("method") == "Network.requestWillBeSent"]
