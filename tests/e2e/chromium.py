"""A headless Chromium spoken to in the DevTools protocol over a pipe (--remote-debugging-pipe: JSON messages that end in a zero
byte, commands on descriptor 3, answers and events on 4). Standard library only."""
import json
import os
import select
import shutil
import subprocess
import tempfile
import time

KEYS = {"Tab": 9, "Enter": 13}


class Browser:
    def __init__(self):
        self.folder = tempfile.mkdtemp(prefix="agreed-chromium-")
        from_us, self.to_it = os.pipe()
        self.from_it, to_us = os.pipe()

        def descriptors():  # first out of the way, so that neither overwrites the other
            os.dup2(from_us, 103)
            os.dup2(to_us, 104)
            os.dup2(103, 3)
            os.dup2(104, 4)

        self.process = subprocess.Popen(
            ["chromium", "--headless", "--no-sandbox", "--disable-gpu", "--no-first-run", "--disable-background-networking",
             "--disable-component-update", "--disable-sync", f"--user-data-dir={self.folder}", "--remote-debugging-pipe",
             "about:blank"],
            preexec_fn=descriptors, close_fds=False, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
        os.close(from_us)
        os.close(to_us)
        self.last_id, self.buffer, self.events, self.session = 0, b"", [], None
        target = self.call("Target.createTarget", url="about:blank")["targetId"]
        self.session = self.call("Target.attachToTarget", targetId=target, flatten=True)["sessionId"]
        for domain in ("Page", "Runtime", "Log", "Network"):
            self.call(domain + ".enable")

    def close(self):
        self.process.terminate()
        try:
            self.process.wait(10)
        except subprocess.TimeoutExpired:
            self.process.kill()
            self.process.wait()
        os.close(self.to_it)
        os.close(self.from_it)
        shutil.rmtree(self.folder, ignore_errors=True)

    def message(self, until):
        while b"\0" not in self.buffer:
            if not select.select([self.from_it], [], [], max(0, until - time.monotonic()))[0]:
                raise AssertionError("the browser does not answer")
            self.buffer += os.read(self.from_it, 1 << 20)
        one, self.buffer = self.buffer.split(b"\0", 1)
        return json.loads(one)

    def call(self, method, **parameters):
        self.last_id += 1
        command = {"id": self.last_id, "method": method, "params": parameters}
        if self.session:
            command["sessionId"] = self.session
        os.write(self.to_it, json.dumps(command).encode() + b"\0")
        until = time.monotonic() + 60
        while True:
            message = self.message(until)
            if message.get("id") == self.last_id:
                if "error" in message:
                    raise AssertionError(f"{method}: {message['error']}")
                return message["result"]
            self.events.append(message)

    def wait_loaded(self, since):
        until = time.monotonic() + 60
        while not any(e.get("method") == "Page.loadEventFired" for e in self.events[since:]):
            self.events.append(self.message(until))

    def go(self, url):
        since = len(self.events)
        self.call("Page.navigate", url=url)
        self.wait_loaded(since)

    def loading(self, act):
        """Does what makes the page load another, and waits until it has."""
        since = len(self.events)
        act()
        self.wait_loaded(since)

    def run(self, script):
        result = self.call("Runtime.evaluate", expression=script, returnByValue=True, awaitPromise=True)
        if "exceptionDetails" in result:
            raise AssertionError(f"{script}: {result['exceptionDetails']}")
        return result["result"].get("value")

    def look_like(self, width, height, scheme):
        self.call("Emulation.setDeviceMetricsOverride", width=width, height=height, deviceScaleFactor=1, mobile=False)
        self.call("Emulation.setEmulatedMedia", features=[{"name": "prefers-color-scheme", "value": scheme}])

    def press(self, key):
        text = {"text": "\r"} if key == "Enter" else {}
        self.call("Input.dispatchKeyEvent", type="keyDown", key=key, code=key, windowsVirtualKeyCode=KEYS[key], **text)
        self.call("Input.dispatchKeyEvent", type="keyUp", key=key, code=key, windowsVirtualKeyCode=KEYS[key])

    def type(self, text):
        self.call("Input.insertText", text=text)

    def complaints(self):
        """Errors of the console, exceptions, refusals of the content policy."""
        found = []
        for event in self.events:
            method, parameters = event.get("method"), event.get("params", {})
            if method == "Log.entryAdded" and parameters["entry"]["level"] == "error":
                found.append(parameters["entry"].get("text", "") + " " + parameters["entry"].get("url", ""))
            if method == "Runtime.exceptionThrown":
                found.append(str(parameters["exceptionDetails"]))
            if method == "Runtime.consoleAPICalled" and parameters["type"] in ("error", "assert"):
                found.append(str(parameters["args"]))
        return found

    def asked_for(self):
        return [e["params"]["request"]["url"] for e in self.events if e.get("method") == "Network.requestWillBeSent"]
