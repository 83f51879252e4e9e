"""A real JupyterLab in a real browser: one server on a folder, one page, as a user has them."""

from __future__ import annotations

import json
import secrets
import socket
import subprocess
import time
import urllib.request
from contextlib import suppress
from pathlib import Path
from typing import Any

from playwright.sync_api import Locator, Page, sync_playwright
from playwright.sync_api import TimeoutError as PlaywrightTimeout

from unlanded.panels.notebooks import lab_command, lab_environment

PROMPTS = ("[...document.querySelectorAll('.jp-NotebookPanel:not(.lm-mod-hidden) .jp-CodeCell "
           ".jp-InputPrompt')].map(e => e.textContent)")
FOLDERS = ("JUPYTER_CONFIG_DIR", "JUPYTER_DATA_DIR", "JUPYTER_RUNTIME_DIR",
           "JUPYTERLAB_SETTINGS_DIR", "JUPYTERLAB_WORKSPACES_DIR", "IPYTHONDIR")
THEME = "@jupyterlab/apputils-extension/themes.jupyterlab-settings"


class Server:
    """JupyterLab on a folder, started by the product's own command, apart from the user's own.

    Parameters
    ----------
    root : the folder it shows
    room : an empty folder for its settings
    """

    def __init__(self, root: Path, room: Path, *, dark: bool = False) -> None:
        self.root = root
        self.token = secrets.token_hex(8)
        self.url = f"http://127.0.0.1:{_free_port()}"
        for name in FOLDERS:
            (room / name).mkdir()
        if dark:
            settings = room / "JUPYTERLAB_SETTINGS_DIR" / THEME
            settings.parent.mkdir(parents=True)
            settings.write_text(json.dumps({"theme": "JupyterLab Dark"}))
        options = ["--no-browser", "--allow-root", "--ip=127.0.0.1",
                   f"--port={self.url.rpartition(':')[2]}", "--ServerApp.port_retries=0",
                   f"--IdentityProvider.token={self.token}"]
        self._log = (room / "server.log").open("wb")
        self._process = subprocess.Popen(
            [*lab_command(root), *options], stdout=self._log, stderr=self._log,
            env={**lab_environment(), **{name: str(room / name) for name in FOLDERS}})
        self._wait()

    def _wait(self, longest: float = 90.0) -> None:
        end = time.monotonic() + longest
        while time.monotonic() < end:
            with suppress(OSError):
                urllib.request.urlopen(f"{self.url}/api?token={self.token}", timeout=5)
                return
            time.sleep(0.2)
        raise TimeoutError("JupyterLab does not answer")

    def stop(self) -> None:
        """End the server and its kernels."""
        self._process.terminate()
        self._process.wait(30)
        self._log.close()


class Lab:
    """The page of a browser on a server; `messages` are the console's, by kind."""

    def __init__(self, server: Server, chromium: str, size: tuple[int, int] = (1280, 720)) -> None:
        self.server = server
        self.messages: list[tuple[str, str]] = []
        self._play = sync_playwright().start()
        self._browser = self._play.chromium.launch(executable_path=chromium,
                                                   args=["--no-sandbox"])
        context = self._browser.new_context(
            viewport={"width": size[0], "height": size[1]}, accept_downloads=True)
        self.page: Page = context.new_page()
        self.page.on("console", lambda m: self.messages.append((m.type, m.text)))
        self.page.on("pageerror", lambda e: self.messages.append(("pageerror", str(e))))

    def begin(self, folder: str) -> None:
        """Forget what the console said; notebooks are those of a folder of the server from here."""
        self._folder = folder
        self.messages.clear()

    def stop_kernels(self) -> None:
        """Stop every kernel of the server."""
        for kernel in self._ask("kernels"):
            self.page.request.delete(
                f"{self.server.url}/api/kernels/{kernel['id']}?token={self.server.token}")

    def _ask(self, what: str) -> Any:
        return self.page.request.get(
            f"{self.server.url}/api/{what}?token={self.server.token}").json()

    @property
    def errors(self) -> list[str]:
        """What the console called an error."""
        return [text for kind, text in self.messages if kind in ("error", "pageerror")]

    def open(self, notebook: str) -> None:
        """Open a notebook of the server's folder, with a kernel that is ready."""
        self.notebook = f"{self._folder}/{notebook}"
        self.page.goto(f"{self.server.url}/lab/tree/{self.notebook}?token={self.server.token}&reset")
        self.page.locator(".jp-NotebookPanel .jp-Notebook").first.wait_for(timeout=90_000)
        self.wait()

    def wait(self, longest: float = 90.0) -> None:
        """Until the notebook's kernel is idle: the page says so before the kernel listens."""
        end = time.monotonic() + longest
        while time.monotonic() < end:
            for session in self._ask("sessions"):
                kernel = session["kernel"]
                if session["path"] == self.notebook and kernel["execution_state"] == "idle" \
                        and kernel["connections"] > 0:
                    return
            self.page.wait_for_timeout(100)
        raise TimeoutError("the kernel does not become idle")

    def run_all(self, longest: float = 180.0) -> None:
        """Run all cells, by the menu, and wait for the last."""
        # A cell that has run before shows its old number until it is asked for again.
        self.page.evaluate("() => document.querySelectorAll('.jp-CodeCell .jp-InputPrompt')"
                           ".forEach(e => e.dataset.before = '1')")
        for _ in range(4):
            self.page.get_by_role("menuitem", name="Run", exact=True).click()
            self.page.locator('.lm-Menu-item[data-command="runmenu:run-all"]').click()
            try:
                self.page.wait_for_function(
                    f"() => {{const p = {PROMPTS}; return p.some(t => /\\*/.test(t)) || "
                    "document.querySelector('.unlanded-panel')}", timeout=5000)
                break
            except PlaywrightTimeout:
                continue  # the click was lost: the kernel's channel was not open yet
        self.page.wait_for_function(
            f"() => {{const p = {PROMPTS}; return p.length && p.every(t => /\\[\\d+\\]/.test(t)) "
            "&& document.querySelector('.unlanded-panel')}", timeout=1000 * longest)
        self.wait()
        self.page.wait_for_timeout(500)

    def printed(self) -> list[list[str]]:
        """What each code cell printed, line by line."""
        return self.page.evaluate(
            "() => [...document.querySelectorAll('.jp-CodeCell')].map(c => "
            "[...c.querySelectorAll('.jp-OutputArea-output[data-mime-type=\"application/"
            "vnd.jupyter.stdout\"] pre')].map(e => e.textContent).join('').split('\\n')"
            ".map(s => s.trimEnd()).filter(s => s))")

    def panel(self) -> Locator:
        """The panel of the notebook."""
        return self.page.locator(".unlanded-panel").first

    def box(self, label: str) -> Locator:
        """The entry box of that label."""
        return self.panel().get_by_label(label, exact=True)

    def drag(self, what: Locator, across: float) -> None:
        """Take something by its middle, pull it so many pixels to the right, and let it settle."""
        grip = what.bounding_box()
        assert grip is not None
        x, y = grip["x"] + grip["width"] / 2, grip["y"] + grip["height"] / 2
        self.page.mouse.move(x, y)
        self.page.mouse.down()
        self.page.mouse.move(x + across, y, steps=8)
        self.page.mouse.up()
        self.page.wait_for_timeout(1000)

    def handle(self, label: str) -> Locator:
        """The handle beside the entry box of that label."""
        row = self.panel().locator(".widget-hbox").filter(has=self.page.locator(
            f"label:text-is('{label}')")).filter(has=self.page.locator(".unlanded-handle"))
        return row.last.locator("[role=slider]")

    def button(self, name: str) -> Locator:
        """The button of that name, which begins with its icon."""
        return self.panel().get_by_role("button", name=name)

    def close(self) -> None:
        """Close the browser."""
        self._browser.close()
        self._play.stop()


def _free_port() -> int:
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        return int(probe.getsockname()[1])

