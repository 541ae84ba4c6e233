# SPDX-License-Identifier: GPL-3.0-or-later
"""Drives headless Chromium over the WebDriver protocol (W3C), with nothing but Python's library."""
import base64
import json
import shutil
import socket
import subprocess
import tempfile
import time
import urllib.error
import urllib.request

FLAGS = ["--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run",
         "--disable-background-networking", "--disable-component-update", "--disable-sync", "--hide-scrollbars"]


def missing():
    """The programs that are not installed."""
    return [p for p in ("chromium", "chromedriver") if not shutil.which(p)]


class Browser:
    def __init__(self):
        self.folder = tempfile.mkdtemp(prefix="pw-browser-")
        with socket.socket() as s:
            s.bind(("127.0.0.1", 0))
            port = s.getsockname()[1]
        self.base = f"http://127.0.0.1:{port}"
        self.driver = subprocess.Popen([shutil.which("chromedriver"), f"--port={port}"],
                                       stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
        self.wait()
        capabilities = {"alwaysMatch": {
            "goog:chromeOptions": {"binary": shutil.which("chromium"),
                                   "args": FLAGS + [f"--user-data-dir={self.folder}"]},
            "goog:loggingPrefs": {"browser": "ALL", "performance": "ALL"}}}
        self.session = "/session/" + self.call("/session", {"capabilities": capabilities})["sessionId"]
        self.call(self.session + "/url", {"url": "about:blank"})

    def __enter__(self):
        return self

    def __exit__(self, *error):
        try:
            self.call(self.session, method="DELETE")
        finally:
            self.driver.terminate()
            self.driver.wait(20)
            shutil.rmtree(self.folder, ignore_errors=True)

    def wait(self):
        for _ in range(200):
            try:
                return self.call("/status")
            except urllib.error.URLError:
                time.sleep(0.05)
        raise RuntimeError("chromedriver does not answer")

    def call(self, path, body=None, method=None):
        data = None if body is None else json.dumps(body).encode()
        request = urllib.request.Request(self.base + path, data, {"Content-Type": "application/json"},
                                         method=method or ("POST" if data else "GET"))
        with urllib.request.urlopen(request, timeout=60) as answer:
            return json.load(answer)["value"]

    def command(self, name, **parameters):
        """A command of the DevTools protocol."""
        return self.call(self.session + "/goog/cdp/execute", {"cmd": name, "params": parameters})

    def look(self, width, dark):
        """The page at a width in CSS pixels, in the light or the dark scheme."""
        self.command("Emulation.setDeviceMetricsOverride", width=width, height=900, deviceScaleFactor=1,
                     mobile=width < 600)
        scheme = {"name": "prefers-color-scheme", "value": "dark" if dark else "light"}
        self.command("Emulation.setEmulatedMedia", media="screen", features=[scheme])

    def open(self, path):
        self.call(self.session + "/url", {"url": "file://" + path})

    def run(self, script, *args):
        return self.call(self.session + "/execute/sync", {"script": script, "args": list(args)})

    def run_async(self, script, *args):
        return self.call(self.session + "/execute/async", {"script": script, "args": list(args)})

    def log(self, kind):
        return self.call(self.session + "/se/log", {"type": kind})

    def picture(self, path):
        """The whole page as a PNG."""
        size = self.command("Page.getLayoutMetrics")["cssContentSize"]
        shot = self.command("Page.captureScreenshot", captureBeyondViewport=True,
                            clip={"x": 0, "y": 0, "width": size["width"], "height": size["height"], "scale": 1})
        with open(path, "wb") as f:
            f.write(base64.b64decode(shot["data"]))

    def key(self, text):
        self.call(self.session + "/actions", {"actions": [{"type": "key", "id": "k", "actions": [
            {"type": "keyDown", "value": text}, {"type": "keyUp", "value": text}]}]})

    def point(self, x, y):
        self.call(self.session + "/actions", {"actions": [{"type": "pointer", "id": "p", "actions": [
            {"type": "pointerMove", "duration": 0, "x": int(x), "y": int(y)}]}]})

    def pdf(self):
        return base64.b64decode(self.command("Page.printToPDF", printBackground=True, preferCSSPageSize=True)["data"])
