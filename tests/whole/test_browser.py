"""The page for the meeting in a real browser: no error, no request, nothing cut off on a telephone or on A4.

Needs Chromium (Debian package `chromium`), as `.ci/run` installs it.
"""

import re
import shutil
import subprocess
import threading
from collections.abc import Iterator
from http.server import BaseHTTPRequestHandler, ThreadingHTTPServer

import pytest

from legwright.show.cli import run

CHROMIUM = shutil.which("chromium")
pytestmark = pytest.mark.skipif(CHROMIUM is None, reason="no chromium here: apt-get install chromium")

BRIEF = """
title = "Test rig"
duty = { kind = "generator", hot_K = 700, cold_K = 400, maximise = "efficiency" }
size = { shape = "grain", min_nm = 20, max_nm = 2000 }
candidates = { use = ["sige-n", "pbte-p", "si-n", "bitese-n"] }
"""

#: measures a page in a frame of a given width, and says it in the title
FRAME = """<!DOCTYPE html><title>waiting</title>
<iframe style="width:{width}px;height:800px;border:0" src="{page}"></iframe>
<script>
onload = () => {{
  const inside = document.querySelector("iframe").contentDocument;
  const wide = [...inside.querySelectorAll("body *")].filter(node =>
    node.getBoundingClientRect().right > {width} + 1 && !node.closest(".scroll, pre, svg, .skip"));
  const small = [...inside.querySelectorAll("svg text")].map(node => node.getBoundingClientRect().height);
  const sizes = small.filter(height => height > 0);
  document.title = [inside.documentElement.scrollWidth, wide.length, Math.min(...sizes).toFixed(2),
    inside.querySelectorAll("svg").length].join(" ");
}};
</script>"""


@pytest.fixture(scope="module")
def page(tmp_path_factory):
    folder = tmp_path_factory.mktemp("browser")
    (folder / "rig.toml").write_text(BRIEF, encoding="utf-8")
    assert run(["rank", str(folder / "rig.toml"), "--draws", "16", "--page", str(folder / "page.html")]) == 0
    return folder / "page.html"


@pytest.fixture
def asked() -> Iterator[tuple[str, list[str]]]:
    """A proxy that answers nothing and remembers what was asked of it: every request of a page would end here."""
    seen: list[str] = []

    class Proxy(BaseHTTPRequestHandler):
        def do_GET(self) -> None:
            seen.append(self.path)
            self.send_error(404)

        do_CONNECT = do_POST = do_GET

        def log_message(self, *_: object) -> None:
            pass

    server = ThreadingHTTPServer(("127.0.0.1", 0), Proxy)
    threading.Thread(target=server.serve_forever, daemon=True).start()
    yield f"127.0.0.1:{server.server_port}", seen
    server.shutdown()
    server.server_close()


def browse(folder, *arguments: str, proxy: str = "127.0.0.1:9") -> subprocess.CompletedProcess[str]:
    """Chromium without a window and without its own errands."""
    command = [
        CHROMIUM,
        "--headless",
        "--no-sandbox",  # root in a container has none
        "--disable-gpu",
        "--disable-dev-shm-usage",
        "--hide-scrollbars",
        "--no-first-run",
        "--disable-background-networking",
        "--disable-component-update",
        "--disable-sync",
        "--disable-extensions",
        "--enable-logging=stderr",
        "--v=0",
        f"--user-data-dir={folder / 'profile'}",
        f"--proxy-server={proxy}",
        "--proxy-bypass-list=<-loopback>",
        "--allow-file-access-from-files",
        "--virtual-time-budget=5000",
        *arguments,
    ]
    return subprocess.run(command, capture_output=True, text=True, timeout=120, check=True)


def console(done: subprocess.CompletedProcess[str]) -> list[str]:
    return [line for line in done.stderr.splitlines() if "CONSOLE" in line]


def of_pages(seen: list[str]) -> list[str]:
    """Without what the browser asks for itself: its maker's hosts."""
    return [path for path in seen if not re.search(r"\.(google|googleapis|gvt1)\.com", path)]


def test_no_console_message_and_no_request(page, tmp_path, asked):
    proxy, seen = asked
    done = browse(tmp_path, "--dump-dom", page.as_uri(), proxy=proxy)
    assert "Verdict" in done.stdout
    assert console(done) == []
    assert of_pages(seen) == []


def test_a_page_with_an_error_and_a_request_would_be_caught(tmp_path, asked):
    proxy, seen = asked
    bad = tmp_path / "bad.html"
    bad.write_text(
        '<!DOCTYPE html><img src="http://elsewhere.test/x.png"><script>console.error("broken")</script>',
        encoding="utf-8",
    )
    done = browse(tmp_path, "--dump-dom", bad.as_uri(), proxy=proxy)
    assert any("broken" in line for line in console(done))
    assert "http://elsewhere.test/x.png" in of_pages(seen)


def measured(page, folder, width: int) -> tuple[float, ...]:
    """Width that the page takes, things over its edge, least letter of its figures (px), figures."""
    frame = folder / "frame.html"
    frame.write_text(FRAME.format(width=width, page=page.as_uri()), encoding="utf-8")
    done = browse(folder, f"--window-size={width + 40},900", "--dump-dom", frame.as_uri())
    title = re.search(r"<title>(.*?)</title>", done.stdout).group(1)
    return tuple(float(word) for word in title.split())


def test_a_page_that_is_too_wide_would_be_caught(tmp_path):
    bad = tmp_path / "bad.html"
    svg = '<svg width="50" height="20"><text y="15" font-size="4">a</text></svg>'
    bad.write_text(f'<!DOCTYPE html><p style="width:600px">wide</p>{svg}', encoding="utf-8")
    scroll, over, letters, figures = measured(bad, tmp_path, 390)
    assert scroll > 600
    assert over == 1
    assert letters < 7.5
    assert figures == 1


@pytest.mark.parametrize("width", [390, 1440])
def test_nothing_hangs_over_the_edge(page, tmp_path, width):
    scroll, over, letters, figures = measured(page, tmp_path, width)
    assert scroll <= width
    assert over == 0
    assert figures > 6
    assert letters > 7.5, "px: the least letter of a figure, with its line"


def test_it_prints_on_a4(page, tmp_path):
    paper = tmp_path / "page.pdf"
    browse(tmp_path, "--no-pdf-header-footer", f"--print-to-pdf={paper}", page.as_uri())
    boxes = set(re.findall(rb"/MediaBox\s*\[\s*0 0 ([\d.]+) ([\d.]+)\s*\]", paper.read_bytes()))
    # 210 × 297 mm in points, to the rounding of the browser
    assert all(abs(float(wide) - 595.28) < 1.5 and abs(float(high) - 841.89) < 1.5 for wide, high in boxes), boxes
    assert boxes


@pytest.mark.parametrize("width", [390, 1440])
def test_a_screenshot_has_ink(page, tmp_path, width):
    from PIL import Image

    shot = tmp_path / "shot.png"
    browse(tmp_path, f"--window-size={width},3000", f"--screenshot={shot}", page.as_uri())
    with Image.open(shot) as seen:
        assert seen.size == (width, 3000)
        dark = sum(seen.convert("L").histogram()[:128])
    assert 0.005 < dark / (width * 3000) < 0.4
