"""The page in a browser: no violation of accessibility rules, well-formed, asking for nothing outside.

The rules are those of axe-core, installed from the npm registry into a temporary folder. Without Chromium, npm or
a network the test says so and is skipped.
"""

import functools
import html
import http.server
import json
import re
import shutil
import subprocess
import threading
from datetime import date

import pytest
from report_demo import demo_comparison
from report_fixture import build_hostile

from actuator_sizing.report.document import prepare_document
from actuator_sizing.report.figures import draw_figures
from actuator_sizing.report.html import render_html

BROWSER = next(filter(None, map(shutil.which, ("chromium", "chromium-browser", "google-chrome"))), None)
AXE = "axe-core@4.10.3"
FLAGS = ("--headless", "--no-sandbox", "--disable-gpu", "--disable-dev-shm-usage", "--disable-background-networking",
         "--disable-component-update", "--disable-sync", "--no-first-run")  # fmt: skip

pytestmark = pytest.mark.skipif(BROWSER is None, reason="needs Chromium")


@pytest.fixture(scope="module")
def axe(tmp_path_factory):
    """Source of the rules."""
    npm = shutil.which("npm")
    if npm is None:
        pytest.skip("needs npm")
    folder = tmp_path_factory.mktemp("axe")
    command = [
        npm,
        "install",
        "--silent",
        "--no-audit",
        "--no-fund",
        "--ignore-scripts",
        "--prefix",
        str(folder),
        AXE,
    ]
    try:
        done = subprocess.run(command, capture_output=True, timeout=90, check=False)
    except subprocess.TimeoutExpired:
        pytest.skip("the npm registry does not answer")
    if done.returncode != 0:
        pytest.skip(f"npm cannot install {AXE}: {done.stderr.decode(errors='replace')[-200:]}")
    return (folder / "node_modules" / "axe-core" / "axe.min.js").read_text(encoding="utf-8")


@pytest.fixture(scope="module", params=["tray_lift", "hostile"])
def page(request):
    comparison = build_hostile() if request.param == "hostile" else demo_comparison(request.param)
    figures = draw_figures(comparison)
    return render_html(prepare_document(comparison, date(2025, 3, 4), figures), figures).decode("utf-8")


def browse(page, folder, *options):
    """Open a page and return what the browser made of it, after its scripts have run."""
    file = folder / "page.html"
    file.write_text(page, encoding="utf-8")
    return visit(file.as_uri(), folder, *options)


def visit(address, folder, *options):
    """Open an address with a profile of its own."""
    profile = f"--user-data-dir={folder / 'profile'}"
    command = [BROWSER, *FLAGS, profile, "--window-size=1200,900", *options, address]
    done = subprocess.run(command, capture_output=True, timeout=240, check=True)
    return done.stdout.decode("utf-8")


def with_script(page, script):
    """The page with a script that its policy would forbid; only the test lifts the policy."""
    page, count = re.subn(r'<meta http-equiv="Content-Security-Policy"[^>]*>', "", page)
    assert count == 1
    assert page.count("</body>") == 1
    return page.replace("</body>", f"<script>{script}</script></body>")


def told(dom):
    """What the script left in the page."""
    return json.loads(html.unescape(re.search(r'<pre id="told">(.*?)</pre>', dom, re.DOTALL)[1]))


TELL = """
const tell = (data) => {
  const place = document.createElement('pre');
  place.id = 'told';
  place.textContent = JSON.stringify(data);
  document.body.append(place);
};
"""


def test_no_rule_of_accessibility_is_broken(page, axe, tmp_path):
    run = (
        f"{TELL} axe.run(document).then((r) => tell({{passes: r.passes.length, violations: r.violations.map("
        "(v) => [v.id, v.help, v.nodes.length, v.nodes[0].html.slice(0, 200)])}));"
    )
    dom = browse(with_script(page, f"{axe}\n{run}"), tmp_path, "--virtual-time-budget=60000", "--dump-dom")
    result = told(dom)
    assert result["violations"] == []
    assert result["passes"] > 20  # the rules did run


def test_the_page_is_well_formed(page, tmp_path):
    """Read as XML, which forgives nothing, it has the elements that the browser's HTML parser finds."""
    script = (
        TELL
        + """
    const text = TEXT;
    const count = (root) => [...root.querySelectorAll('body *')].map((e) => e.localName);
    const whole = text.replace(/<!DOCTYPE html>/, '')
      .replace(/<html lang/, '<html xmlns="http://www.w3.org/1999/xhtml" lang')
      .replace(/<(meta|col|br|hr)\\b([^>]*?)\\/?>/g, '<$1$2/>')
      .replace(/<style>[^]*?<\\/style>/, '').replace(/&nbsp;/g, '\\u00a0');
    const strict = new DOMParser().parseFromString(whole, 'application/xhtml+xml');
    const error = strict.querySelector('parsererror');
    const lax = new DOMParser().parseFromString(text, 'text/html');
    tell({error: error ? error.textContent.slice(0, 400) : '', same: count(strict).join() === count(lax).join(),
          elements: count(lax).length});
    """
    )
    literal = json.dumps(page).replace("</", "<\\/")
    blank = (
        '<!DOCTYPE html><title>t</title><meta http-equiv="Content-Security-Policy" content="x"><body></body>'
    )
    result = told(browse(with_script(blank, script.replace("TEXT", literal)), tmp_path, "--dump-dom"))
    assert result["error"] == ""
    assert result["same"]
    assert result["elements"] > 500


class Quiet(http.server.SimpleHTTPRequestHandler):
    """Serves a folder without a word."""

    def log_message(self, *_):
        return


def test_the_page_asks_for_nothing(page, tmp_path):
    """The browser's own log of requests names no address but the page's and, for the connection, its site's."""
    folder, log = tmp_path / "site", tmp_path / "requests.json"
    folder.mkdir()
    (folder / "page.html").write_text(page, encoding="utf-8")
    handler = functools.partial(Quiet, directory=str(folder))
    with http.server.ThreadingHTTPServer(("127.0.0.1", 0), handler) as server:
        threading.Thread(target=server.serve_forever, daemon=True).start()
        site = f"http://127.0.0.1:{server.server_port}/"
        address = f"{site}page.html"
        visit(address, tmp_path, f"--log-net-log={log}", "--dump-dom")
        server.shutdown()
    asked = set(re.findall(r'"url":\s*"([^"]+)"', log.read_text(encoding="utf-8")))
    assert address in asked  # the log does see requests
    # The browser calls home by itself, whatever page it shows; the page never names these hosts.
    home = re.compile(r"https?://[a-z0-9.]*\.(google|googleapis|gvt1)\.com/")
    assert not home.search(page)
    other = {url for url in asked - {address, site} if not home.match(url)}
    assert {url for url in other if url.startswith(("http:", "https:", "ws:", "wss:", "ftp:"))} == set()
