"""A headless Chromium, driven through its DevTools protocol over a pipe: file descriptors 3 and 4, JSON ended by NUL."""
import base64
import json
import os
import select
import shutil
import subprocess
import tempfile
import time

FLAGS = ["--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run", "--disable-background-networking",
         "--disable-component-update", "--disable-sync", "--disable-dev-shm-usage", "--hide-scrollbars", "--force-device-scale-factor=1", "--remote-debugging-pipe"]


def chromium():
    """Where the browser is, or None."""
    return next(filter(None, map(shutil.which, ("chromium", "chromium-browser", "google-chrome"))), None)


class Browser:
    def __init__(self):
        self.folder = tempfile.mkdtemp(prefix="leat-pages-")
        to_child, self.write = os.pipe()
        self.read, from_child = os.pipe()
        os.set_inheritable(to_child, True)
        os.set_inheritable(from_child, True)
        # The shell puts the pipes at descriptors 3 and 4, by way of 8 and 9: they may stand there already the wrong way round.
        start = f'exec 8<&{to_child} 9>&{from_child} 3<&8 4>&9; exec "$0" "$@"'
        self.process = subprocess.Popen(["/bin/bash", "-c", start, chromium(), *FLAGS, f"--user-data-dir={self.folder}"], close_fds=True,
                                        pass_fds=(to_child, from_child), stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
        os.close(to_child)
        os.close(from_child)
        self.number, self.buffer, self.events = 0, b"", []

    def message(self, until):
        while b"\0" not in self.buffer:
            if not select.select([self.read], [], [], max(0, until - time.monotonic()))[0]:
                raise TimeoutError("the browser does not answer")
            piece = os.read(self.read, 1 << 20)
            if not piece:
                raise RuntimeError("the browser has ended")
            self.buffer += piece
        text, self.buffer = self.buffer.split(b"\0", 1)
        return json.loads(text)

    def call(self, method, session=None, seconds=60, **parameters):
        self.number += 1
        asked = {"id": self.number, "method": method, "params": parameters}
        if session:
            asked["sessionId"] = session
        os.write(self.write, json.dumps(asked).encode() + b"\0")
        until = time.monotonic() + seconds
        while True:
            told = self.message(until)
            if told.get("id") == self.number:
                if "error" in told:
                    raise RuntimeError(f"{method}: {told['error']['message']}")
                return told["result"]
            if "method" in told:
                self.events.append(told)

    def open(self, path, *settings, **others):
        return Page(self, path, *settings, **others)

    def close(self):
        try:
            self.call("Browser.close", seconds=10)
            self.process.wait(10)
        except (TimeoutError, RuntimeError, OSError, subprocess.TimeoutExpired):
            self.process.kill()
            self.process.wait()
        os.close(self.write)
        os.close(self.read)
        shutil.rmtree(self.folder, ignore_errors=True)


class Page:
    """A page that has been opened, with all that it said and asked for."""

    def __init__(self, browser, path, width=1400, height=1000, dark=False, scripts=True):
        self.browser = browser
        self.target = browser.call("Target.createTarget", url="about:blank")["targetId"]
        self.session = browser.call("Target.attachToTarget", targetId=self.target, flatten=True)["sessionId"]
        for domain in ("Page", "Runtime", "Network", "Log"):
            self.call(f"{domain}.enable")
        self.call("Emulation.setDeviceMetricsOverride", width=width, height=height, deviceScaleFactor=1, mobile=False)
        self.call("Emulation.setEmulatedMedia", features=[{"name": "prefers-color-scheme", "value": "dark" if dark else "light"}])
        if not scripts:
            self.call("Emulation.setScriptExecutionDisabled", value=True)
        self.url = "file://" + os.path.abspath(path)
        self.call("Page.navigate", url=self.url)
        self.wait_for("document.readyState === 'complete'" + (" && document.documentElement.classList.contains('drawn')" if scripts else ""))

    def call(self, method, **parameters):
        return self.browser.call(method, session=self.session, **parameters)

    def value(self, expression):
        told = self.call("Runtime.evaluate", expression=expression, returnByValue=True, awaitPromise=True)
        if "exceptionDetails" in told:
            raise RuntimeError(f"{expression}: {told['exceptionDetails']}")
        return told["result"].get("value")

    def wait_for(self, expression, seconds=40):
        until = time.monotonic() + seconds
        while time.monotonic() < until:
            if self.value(expression):
                return True
            time.sleep(0.05)
        return False

    def show(self, width, tone, height=1000):
        """As wide as this, light or dark as the system has it; the page waits 0.12 s before it redraws."""
        self.call("Emulation.setDeviceMetricsOverride", width=width, height=height, deviceScaleFactor=1, mobile=False)
        self.call("Emulation.setEmulatedMedia", features=[{"name": "prefers-color-scheme", "value": tone}])
        time.sleep(0.4)

    def trouble(self):
        """Everything the page complained about: exceptions, console errors, refused content."""
        told = []
        for event in self.mine():
            name, details = event["method"], event["params"]
            if name == "Runtime.exceptionThrown":
                told.append(details["exceptionDetails"].get("exception", {}).get("description", details["exceptionDetails"]["text"]))
            elif name == "Runtime.consoleAPICalled" and details["type"] in ("error", "warning", "assert"):
                told.append(" ".join(str(one.get("value", one.get("description"))) for one in details["args"]))
            elif name == "Log.entryAdded" and details["entry"]["level"] in ("error", "warning"):
                told.append(details["entry"]["text"])
        return told

    def requests(self):
        """Everything it asked for besides itself."""
        return [event["params"]["request"]["url"] for event in self.mine()
                if event["method"] == "Network.requestWillBeSent" and event["params"]["request"]["url"].split("#")[0] != self.url]

    def mine(self):
        return [event for event in self.browser.events if event.get("sessionId") == self.session]

    def screenshot(self, path, whole=True):
        size = self.call("Page.getLayoutMetrics")["cssContentSize"]
        area = {"x": 0, "y": 0, "width": size["width"], "height": min(size["height"], 16000), "scale": 1}
        told = self.call("Page.captureScreenshot", format="png", captureBeyondViewport=whole, **({"clip": area} if whole else {}))
        with open(path, "wb") as file:
            file.write(base64.b64decode(told["data"]))

    def close(self):
        self.browser.call("Target.closeTarget", targetId=self.target)
