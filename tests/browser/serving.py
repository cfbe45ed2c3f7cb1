"""Servers and a browser for the tests: everything on this machine, in a temporary home, nothing fetched on purpose."""

from __future__ import annotations

import contextlib
import json
import os
import socket
import subprocess
import sys
import time
import urllib.error
import urllib.request
from collections.abc import Iterator
from pathlib import Path

import nbformat

ARGUMENTS = [
    "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run", "--disable-background-networking", "--disable-component-update",
    "--disable-sync",
]  # fmt: skip


def free_port() -> int:
    with socket.socket() as ear:
        ear.bind(("127.0.0.1", 0))
        return int(ear.getsockname()[1])


def write_notebook(path: Path, *cells: str) -> Path:
    book = nbformat.v4.new_notebook(
        cells=[nbformat.v4.new_code_cell(source) for source in cells],
        metadata={"kernelspec": {"name": "python3", "display_name": "Python 3", "language": "python"}},
    )
    nbformat.write(book, path)
    return path


@contextlib.contextmanager
def served(program: str, folder: Path, home: Path) -> Iterator[str]:
    """Start ``voila`` or ``lab`` over a folder; gives its address."""
    port = free_port()
    common = ["--no-browser", f"--ServerApp.root_dir={folder}"]
    if program == "voila":
        command = [sys.executable, "-m", "voila", str(folder), "--no-browser", f"--port={port}", "--Voila.ip=127.0.0.1"]
        ready = f"http://127.0.0.1:{port}/"
    else:
        command = [
            sys.executable, "-m", "jupyterlab", *common, f"--ServerApp.port={port}", "--ServerApp.ip=127.0.0.1", "--IdentityProvider.token=",
            "--ServerApp.password=", "--ServerApp.disable_check_xsrf=True", "--ServerApp.allow_root=True",
        ]  # fmt: skip
        ready = f"http://127.0.0.1:{port}/api"
        settings = home / ".jupyter" / "lab" / "user-settings" / "@jupyterlab" / "apputils-extension"
        settings.mkdir(parents=True, exist_ok=True)
        (settings / "notification.jupyterlab-settings").write_text(json.dumps({"fetchNews": "false", "checkForUpdates": False}))
    environment = os.environ | {
        "HOME": str(home), "JUPYTER_CONFIG_DIR": str(home / ".jupyter"), "JUPYTER_RUNTIME_DIR": str(home / "runtime"),
        "JUPYTER_DATA_DIR": str(home / "data"), "IPYTHONDIR": str(home / "ipython"), "JUPYTERLAB_SETTINGS_DIR": str(home / ".jupyter" / "lab" / "user-settings"),
    }  # fmt: skip
    with (home / f"{program}.log").open("wb") as log:
        process = subprocess.Popen(command, env=environment, stdout=log, stderr=subprocess.STDOUT, cwd=folder)
        try:
            _wait(ready, process, home / f"{program}.log")
            yield f"http://127.0.0.1:{port}"
        finally:
            process.terminate()
            try:
                process.wait(10)
            except subprocess.TimeoutExpired:
                process.kill()
                process.wait(10)


def _wait(address: str, process: subprocess.Popen[bytes], log: Path, seconds: float = 60.0) -> None:
    deadline = time.monotonic() + seconds
    while time.monotonic() < deadline:
        if process.poll() is not None:
            raise RuntimeError(f"the server ended: {log.read_text(errors='replace')[-2000:]}")
        try:
            with urllib.request.urlopen(address, timeout=2):
                return
        except (urllib.error.URLError, OSError):
            time.sleep(0.2)
    raise RuntimeError(f"the server did not answer: {log.read_text(errors='replace')[-2000:]}")


@contextlib.contextmanager
def browser(executable: str) -> Iterator[object]:
    """A headless Chromium."""
    from playwright.sync_api import sync_playwright

    with sync_playwright() as driver:
        chromium = driver.chromium.launch(executable_path=executable, args=ARGUMENTS)
        try:
            yield chromium
        finally:
            chromium.close()
