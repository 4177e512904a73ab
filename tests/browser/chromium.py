"""Open a local page in headless Chromium with no network and say what it did.

The browser runs in a network namespace without an interface where the system permits one, else
with every host name unresolvable and a closed proxy. It is driven through its debugging pipe, so
that no port is opened and no driver program is needed. For tests of maps and sheets::

    with open_page(path, PHONE) as page:
        assert page.errors == []
        assert page.requests == []
        assert page.evaluate("document.title") == "..."
        page.screenshot(folder / "phone.png")
"""

import base64
import json
import os
import selectors
import shutil
import subprocess
import tempfile
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

PATIENCE_S = 60.0
SWITCHES = (
    "--headless=new",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-dev-shm-usage",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
    "--no-first-run",
    "--no-default-browser-check",
    "--mute-audio",
    "--hide-scrollbars",
    "--remote-debugging-pipe",
)


@dataclass(frozen=True)
class Screen:
    """A window in CSS pixels; ``touch`` makes it a phone: mobile viewport and touch input."""

    width: int
    height: int
    touch: bool = False


PHONE = Screen(390, 844, touch=True)
DESKTOP = Screen(1280, 900)


def chromium_program() -> str:
    """Find the browser; FileNotFoundError names what to install."""
    for name in ("chromium", "chromium-browser", "google-chrome"):
        found = shutil.which(name)
        if found:
            return found
    message = "chromium is not on the PATH; install it to run the tests marked browser"
    raise FileNotFoundError(message)


def command_without_network() -> list[str]:
    """Give the command line that starts the browser cut off from every network."""
    for namespace in (["unshare", "-n"], ["unshare", "-r", "-n"]):
        tried = subprocess.run([*namespace, "true"], capture_output=True, check=False)
        if tried.returncode == 0:
            return [*namespace, chromium_program(), *SWITCHES]
    deaf = ["--host-resolver-rules=MAP * ~NOTFOUND", "--proxy-server=127.0.0.1:9"]
    return [chromium_program(), *SWITCHES, *deaf]


def unheard(event: dict[str, Any]) -> None:
    """Let an event pass while no page is open."""


class Pipe:
    """The debugging pipe: JSON messages, each ended by a zero byte."""

    def __init__(self, profile: str) -> None:
        command_read, self._write = os.pipe()
        self._read, answer_write = os.pipe()

        def lend_descriptors() -> None:
            # The browser expects its commands on 3 and answers on 4; both may be taken just now.
            safe_read, safe_write = os.dup(command_read), os.dup(answer_write)
            os.dup2(safe_read, 3)
            os.dup2(safe_write, 4)

        self._browser = subprocess.Popen(
            [*command_without_network(), f"--user-data-dir={profile}", "about:blank"],
            stdin=subprocess.DEVNULL,
            stdout=subprocess.DEVNULL,
            stderr=subprocess.DEVNULL,
            close_fds=False,
            preexec_fn=lend_descriptors,
            start_new_session=True,
        )
        os.close(command_read)
        os.close(answer_write)
        self._selector = selectors.DefaultSelector()
        self._selector.register(self._read, selectors.EVENT_READ)
        self._rest = b""
        self._serial = 0
        self.hear: Callable[[dict[str, Any]], None] = unheard

    def _messages(self, wait_s: float) -> Iterator[dict[str, Any]]:
        if not self._selector.select(wait_s):
            return
        piece = os.read(self._read, 1 << 20)
        if not piece:
            message = "the browser ended before it answered"
            raise ChildProcessError(message)
        *whole, self._rest = (self._rest + piece).split(b"\0")
        for text in whole:
            yield json.loads(text)

    def call(self, method: str, session: str = "", **parameters: Any) -> dict[str, Any]:
        """Send one command and wait for its answer; events on the way go to ``hear``."""
        self._serial += 1
        command: dict[str, Any] = {"id": self._serial, "method": method, "params": parameters}
        if session:
            command["sessionId"] = session
        os.write(self._write, json.dumps(command).encode() + b"\0")
        end = time.monotonic() + PATIENCE_S
        answer: dict[str, Any] | None = None
        while answer is None:
            if time.monotonic() > end:
                message = f"{method} had no answer within {PATIENCE_S:.0f} s"
                raise TimeoutError(message)
            for heard in self._messages(1.0):
                if heard.get("id") == self._serial:
                    answer = heard
                elif "method" in heard:
                    self.hear(heard)
        if "error" in answer:
            message = f"{method}: {answer['error']}"
            raise RuntimeError(message)
        return dict(answer["result"])

    def listen(self, seconds: float) -> None:
        """Let events come in for a while."""
        end = time.monotonic() + seconds
        while (left := end - time.monotonic()) > 0:
            for heard in self._messages(left):
                self.hear(heard)

    def close(self) -> None:
        """End this browser and no other."""
        self._browser.terminate()
        try:
            self._browser.wait(10)
        except subprocess.TimeoutExpired:
            self._browser.kill()
            self._browser.wait()
        self._selector.close()
        os.close(self._write)
        os.close(self._read)


@dataclass
class Page:
    """One open page: what it logged, what it asked for, and ways to look at it.

    ``errors`` holds uncaught exceptions, ``console.error`` and what the browser itself logs as an
    error (blocked or failed requests). ``requests`` holds every address asked for except the
    page itself and data carried inside it.
    """

    pipe: Pipe
    session: str
    address: str
    errors: list[str] = field(default_factory=list)
    console: list[str] = field(default_factory=list)
    requests: list[str] = field(default_factory=list)
    loaded: bool = False

    def hear(self, event: dict[str, Any]) -> None:
        """Sort one event of the browser into the lists above."""
        said = event.get("params", {})
        match event["method"]:
            case "Runtime.exceptionThrown":
                details = said["exceptionDetails"]
                thrown = details.get("exception", {}).get("description", details["text"])
                self.errors.append(thrown)
            case "Runtime.consoleAPICalled":
                text = " ".join(str(a.get("value", a.get("description"))) for a in said["args"])
                self.console.append(f"{said['type']}: {text}")
                if said["type"] in ("error", "assert"):
                    self.errors.append(text)
            case "Log.entryAdded":
                entry = said["entry"]
                self.console.append(f"{entry['level']}: {entry['text']} {entry.get('url', '')}")
                if entry["level"] == "error":
                    self.errors.append(f"{entry['text']} {entry.get('url', '')}")
            case "Network.requestWillBeSent":
                asked = said["request"]["url"]
                if not asked.startswith(("data:", "blob:")) and asked != self.address:
                    self.requests.append(asked)
            case "Page.loadEventFired":
                self.loaded = True

    def call(self, method: str, **parameters: Any) -> dict[str, Any]:
        """Send one command to this page."""
        return self.pipe.call(method, self.session, **parameters)

    def evaluate(self, script: str) -> Any:
        """Run JavaScript in the page and return its value; promises are waited for."""
        answer = self.call(
            "Runtime.evaluate", expression=script, returnByValue=True, awaitPromise=True
        )
        if "exceptionDetails" in answer:
            raise RuntimeError(str(answer["exceptionDetails"]))
        return answer["result"].get("value")

    def settle(self, seconds: float = 0.4) -> None:
        """Wait until the page has drawn, then listen a little for late messages."""
        self.evaluate("new Promise(r => requestAnimationFrame(() => requestAnimationFrame(r)))")
        self.pipe.listen(seconds)

    def press(self, x: float, y: float) -> None:
        """Press and release the main mouse button at a point of the window."""
        for kind in ("mouseMoved", "mousePressed", "mouseReleased"):
            self.call(
                "Input.dispatchMouseEvent",
                type=kind,
                x=x,
                y=y,
                button="none" if kind == "mouseMoved" else "left",
                clickCount=0 if kind == "mouseMoved" else 1,
            )

    def dom(self) -> str:
        """Give the document as it stands after its scripts ran."""
        return str(self.evaluate("document.documentElement.outerHTML"))

    def screenshot(self, target: Path) -> Path:
        """Save the window as PNG."""
        target.write_bytes(base64.b64decode(self.call("Page.captureScreenshot")["data"]))
        return target

    def pdf(self, target: Path) -> Path:
        """Save the page as it would be printed."""
        sent = self.call("Page.printToPDF", printBackground=True, preferCSSPageSize=True)
        target.write_bytes(base64.b64decode(sent["data"]))
        return target


@contextmanager
def open_page(path: Path, screen: Screen = DESKTOP) -> Iterator[Page]:
    """Open a local file, wait until it has drawn, and close the browser afterwards."""
    address = path.resolve().as_uri()
    with tempfile.TemporaryDirectory(ignore_cleanup_errors=True) as profile:
        pipe = Pipe(profile)
        try:
            target = pipe.call("Target.createTarget", url="about:blank")["targetId"]
            attached = pipe.call("Target.attachToTarget", targetId=target, flatten=True)
            page = Page(pipe, attached["sessionId"], address)
            pipe.hear = page.hear
            for domain in ("Page", "Runtime", "Log", "Network"):
                page.call(f"{domain}.enable")
            page.call(
                "Emulation.setDeviceMetricsOverride",
                width=screen.width,
                height=screen.height,
                deviceScaleFactor=1,
                mobile=screen.touch,
            )
            if screen.touch:
                page.call("Emulation.setTouchEmulationEnabled", enabled=True)
            page.loaded = False
            page.call("Page.navigate", url=address)
            end = time.monotonic() + PATIENCE_S
            while not page.loaded and time.monotonic() < end:
                pipe.listen(0.05)
            page.settle()
            yield page
        finally:
            pipe.close()


def dump_dom(path: Path, screen: Screen = DESKTOP) -> str:
    """Give the document of a page as it stands after its scripts ran."""
    with open_page(path, screen) as page:
        return page.dom()


def screenshot(path: Path, target: Path, screen: Screen = DESKTOP) -> Path:
    """Save a picture of a page as PNG."""
    with open_page(path, screen) as page:
        return page.screenshot(target)


def console_errors(path: Path, screen: Screen = DESKTOP) -> list[str]:
    """List what a page logged as errors."""
    with open_page(path, screen) as page:
        return page.errors


def outside_requests(path: Path, screen: Screen = DESKTOP) -> list[str]:
    """List every address that a page asked for beside itself."""
    with open_page(path, screen) as page:
        return page.requests
