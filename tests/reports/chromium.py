"""Headless Chromium by its command line: what a page says, asks for and looks like."""

from __future__ import annotations

import json
import re
import shutil
import subprocess
import tempfile
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

PROGRAMS = ("chromium", "chromium-browser", "google-chrome")
FLAGS = (
    "--headless",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
    "--disable-default-apps",
    "--disable-extensions",
    "--disable-domain-reliability",
    "--no-pings",
    "--hide-scrollbars",
    # the browser's own errands find nobody either
    "--host-resolver-rules=MAP * ~NOTFOUND, EXCLUDE 127.0.0.1",
)
SECONDS = 120
#: Read what a page looks like, from inside a copy of it.
PROBE = """
<script>
  addEventListener('load', () => {
    const width = document.documentElement.clientWidth;
    const wide = [];
    for (const e of document.querySelectorAll('body *')) {
      if (e.closest('svg') || e.matches('.skip, .strip')) continue;
      const box = e.getBoundingClientRect();
      if (box.width && (box.right > width + 1 || box.left < -1))
        wide.push(e.tagName + ' ' + e.textContent.slice(0, 40));
    }
    const figures = [...document.querySelectorAll('figure svg')].map(e => {
      const box = e.getBoundingClientRect();
      return [box.width, box.height];
    });
    const found = {
      width,
      scroll: document.documentElement.scrollWidth,
      wide: wide.slice(0, 5),
      figures,
      headings: [...document.querySelectorAll('h1, h2, h3')].map(e => e.tagName),
      title: document.title,
      links: [...document.querySelectorAll('main a')].length,
    };
    parent.postMessage(JSON.stringify(found), '*');
  });
</script>
"""
#: Holds the page in a frame, since a window is never narrower than 500 pixels.
FRAME = """<!DOCTYPE html><html lang="en"><title>frame</title><body style="margin: 0">
<script>
  addEventListener('message', event => {
    const place = document.createElement('pre');
    place.id = 'probe';
    place.textContent = event.data;
    document.body.append(place);
  });
</script>
<iframe src="%s" style="border: 0; width: %dpx; height: 1000px"></iframe>
</body></html>
"""


@dataclass(frozen=True)
class Run:
    """What a run of the browser left behind."""

    out: str
    log: str
    requests: tuple[str, ...]

    @property
    def console(self) -> list[str]:
        """Lines that the page or its policy wrote to the console."""
        return re.findall(r"CONSOLE[^\n]*", self.log)


def program() -> str:
    """Path of the browser; skips the test where there is none."""
    for name in PROGRAMS:
        path = shutil.which(name)
        if path is not None:
            return path
    pytest.skip("headless Chromium is not installed")


def browse(page: Path, *options: str, width: int = 1400, height: int = 1000) -> Run:
    """Open a page and return standard output, log and requests."""
    with tempfile.TemporaryDirectory() as folder:
        net = Path(folder) / "net.json"
        done = subprocess.run(
            [
                program(),
                *FLAGS,
                f"--user-data-dir={folder}/profile",
                f"--log-net-log={net}",
                "--enable-logging=stderr",
                f"--window-size={width},{height}",
                *options,
                page.as_uri(),
            ],
            capture_output=True,
            text=True,
            timeout=SECONDS,
            check=False,
        )
        assert done.returncode == 0, done.stderr[-2000:]
        return Run(done.stdout, done.stderr, _requests(net))


def _requests(net: Path) -> tuple[str, ...]:
    """Addresses that were asked for, the errands of the browser itself apart."""
    text = net.read_text(encoding="utf-8", errors="replace")
    found = re.findall(r'"url":"((?:https?|wss?|ftp)://[^"]*)"', text)
    return tuple(
        address
        for address in dict.fromkeys(found)
        if not re.match(r"https?://([a-z0-9-]+\.)*(google|googleapis)\.com/", address)
    )


def probe(html: str, folder: Path, width: int) -> dict[str, Any]:
    """Measure a page at a width."""
    free = re.sub(r"<meta http-equiv[^>]*>", "", html, count=1)
    copy = folder / "copy.html"
    copy.write_text(free.replace("</body>", f"{PROBE}</body>"), encoding="utf-8")
    frame = folder / f"frame_{width}.html"
    frame.write_text(FRAME % (copy.name, width), encoding="utf-8")
    dom = browse(frame, "--dump-dom", width=max(width, 500) + 50).out
    found = re.search(r'<pre id="probe">(.*?)</pre>', dom, re.DOTALL)
    assert found is not None, "the probe did not run"
    import html as escapes

    measured: dict[str, Any] = json.loads(escapes.unescape(found.group(1)))
    return measured
