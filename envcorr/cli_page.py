"""The command that opens the page in the browser."""

from __future__ import annotations

import click

__all__ = ["OPTIONS", "page"]

OPTIONS = {
    "server.headless": "true",
    "server.address": "127.0.0.1",
    "server.fileWatcherType": "none",
    "server.maxUploadSize": "20",
    "server.enableXsrfProtection": "true",
    "server.enableCORS": "true",
    "browser.gatherUsageStats": "false",
    "browser.serverAddress": "localhost",
    "client.toolbarMode": "minimal",
    "client.showErrorDetails": "type",
    "client.showErrorLinks": "false",
}
"""Local only, and no request leaves the machine."""


@click.command()
@click.option("--port", type=click.IntRange(1024, 65535), default=8501, show_default=True, help="Where it listens.")
def page(port: int) -> None:
    """The page in the browser, on this machine only.

    Open http://localhost:PORT when it says so; Ctrl-C ends it.
    """
    import subprocess
    import sys
    from importlib.resources import as_file, files

    with as_file(files("envcorr").joinpath("page/server.py")) as script:
        options = [f"--{name}={value}" for name, value in OPTIONS.items()]
        command = [sys.executable, "-m", "streamlit", "run", str(script), f"--server.port={port}", *options]
        click.echo(f"envcorr page: http://localhost:{port}", err=True)
        sys.exit(subprocess.run(command, check=False).returncode)
