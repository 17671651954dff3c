"""A headless Chromium that opens pages from disk and tells what they did. Debian's chromium-driver."""

import json
import os
import pathlib
import subprocess
import tempfile

from selenium import webdriver
from selenium.webdriver.chrome.service import Service


class Browser:
    """One browser for a whole test case; close() ends it."""

    def __init__(self):
        options = webdriver.ChromeOptions()
        options.binary_location = "/usr/bin/chromium"
        # Root has no sandbox; the pages are our own, from disk.
        for argument in ("--headless=new", "--no-sandbox", "--disable-gpu", "--disable-dev-shm-usage", "--window-size=1200,900"):
            options.add_argument(argument)
        options.set_capability("goog:loggingPrefs", {"browser": "ALL", "performance": "ALL"})
        self.driver = webdriver.Chrome(service=Service("/usr/bin/chromedriver"), options=options)
        self.driver.execute_cdp_cmd("Network.enable", {})

    def close(self):
        self.driver.quit()

    def open(self, path):
        self.drain()
        self.driver.get(pathlib.Path(path).as_uri())

    def drain(self):
        """What the console said and what was asked for since the last time."""
        said = [entry["message"] for entry in self.driver.get_log("browser")]
        asked = []
        for entry in self.driver.get_log("performance"):
            message = json.loads(entry["message"])["message"]
            if message["method"] == "Network.requestWillBeSent":
                asked.append(message["params"]["request"]["url"])
        return said, asked

    def run(self, script, *arguments):
        return self.driver.execute_script(script, *arguments)

    def command(self, name, **parameters):
        return self.driver.execute_cdp_cmd(name, parameters)

    def screen(self, width, height, ratio=1):
        self.command("Emulation.setDeviceMetricsOverride", width=width, height=height, deviceScaleFactor=ratio, mobile=False)

    def prefers_dark(self, dark):
        self.command("Emulation.setEmulatedMedia",
                     features=[{"name": "prefers-color-scheme", "value": "dark" if dark else "light"}])


def page_of(model, folder=None):
    """The report of a model, written to disk; its path."""
    folder = folder or tempfile.mkdtemp(prefix="idlewire-")
    path = os.path.join(folder, pathlib.Path(model).parent.name + "-" + pathlib.Path(model).stem + ".html")
    run = subprocess.run([os.environ["IDLEWIRE"], "predict", str(model), "--quiet", "--html", path], capture_output=True, text=True)
    if run.returncode:
        raise AssertionError(f"no page of {model}: {run.stderr}")
    return path
