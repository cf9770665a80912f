"""The page in a real browser: narrow screens, printing, what it asks for, and its policy at work."""

import base64
import http.server
import os
import re
import shutil
import subprocess
import threading
from collections.abc import Iterator

import pytest
from made_report import made

from outcomes.report.render import render

webdriver = pytest.importorskip("selenium.webdriver")
pytestmark = pytest.mark.browser

FLAGS = (
    "--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run", "--disable-sync",
    "--disable-background-networking", "--disable-component-update",
)  # fmt: skip


@pytest.fixture(scope="module")
def driver(tmp_path_factory) -> Iterator:
    browser, helper = shutil.which("chromium"), shutil.which("chromedriver")
    if browser is None or helper is None:
        if os.environ.get("CI"):
            pytest.fail("the browser tests need Chromium and its driver, and CI has none")
        pytest.skip("no Chromium here")
    options = webdriver.ChromeOptions()
    options.binary_location = browser
    for flag in (*FLAGS, f"--user-data-dir={tmp_path_factory.mktemp('profile')}"):
        options.add_argument(flag)
    options.set_capability("goog:loggingPrefs", {"browser": "ALL"})
    made_driver = webdriver.Chrome(options=options, service=webdriver.ChromeService(helper))
    yield made_driver
    made_driver.quit()


class Witness(http.server.SimpleHTTPRequestHandler):
    """Serves one page and remembers every request."""

    page = ""
    seen: tuple[str, ...] = ()

    def do_GET(self):
        Witness.seen = (*Witness.seen, self.path)
        body = Witness.page.encode("utf-8") if self.path == "/report.html" else b""
        self.send_response(200 if body else 404)
        self.send_header("Content-Type", "text/html; charset=utf-8")
        self.send_header("Content-Length", str(len(body)))
        self.end_headers()
        self.wfile.write(body)

    def log_message(self, format, *args):
        """Says nothing."""


@pytest.fixture(scope="module")
def address() -> Iterator[str]:
    server = http.server.ThreadingHTTPServer(("127.0.0.1", 0), Witness)
    thread = threading.Thread(target=server.serve_forever, daemon=True)
    thread.start()
    yield f"http://127.0.0.1:{server.server_port}/report.html"
    server.shutdown()
    thread.join()
    server.server_close()


def opened(driver, address: str, page: str, width: int = 1280) -> None:
    Witness.page, Witness.seen = page, ()
    screen = {"width": width, "height": 900, "deviceScaleFactor": 1, "mobile": width < 600}
    driver.execute_cdp_cmd("Emulation.setDeviceMetricsOverride", screen)
    driver.get_log("browser")
    driver.get(address)


def test_the_page_asks_the_network_for_nothing(driver, address):
    opened(driver, address, render(made()))
    loaded = driver.execute_script("return performance.getEntriesByType('resource').map(e => e.name)")
    assert loaded == []
    assert [path for path in Witness.seen if path != "/favicon.ico"] == ["/report.html"]
    assert not [e for e in driver.get_log("browser") if "favicon" not in e["message"]]


@pytest.mark.parametrize("width", [320, 640, 1280])
def test_the_page_never_scrolls_sideways(driver, address, width):
    opened(driver, address, render(made("Averyveryverylongnamewithoutanyspaceatall" * 3)), width)
    assert driver.execute_script("return document.documentElement.scrollWidth") <= width


def test_it_survives_wider_text_spacing_and_double_size(driver, address):
    """The values are those of WCAG 2.2, criterion 1.4.12; the narrow screen is 200 % zoom of 640 pixels."""
    page = render(made())
    style = "*{line-height:1.5!important;letter-spacing:.12em!important;word-spacing:.16em!important}"
    opened(driver, address, page, 320)
    driver.execute_script(
        "const s = new CSSStyleSheet(); s.replaceSync(arguments[0]); document.adoptedStyleSheets = [s]", style
    )
    assert (
        driver.execute_script("return getComputedStyle(document.querySelector('p')).letterSpacing")
        != "normal"
    )
    assert driver.execute_script("return document.documentElement.scrollWidth") <= 320


def test_the_policy_applies_our_style_and_stops_everything_else(driver, address):
    page = render(made())
    foul = page.replace(
        "</body>",
        "<script>document.title='ran'</script>"
        '<img src="http://127.0.0.1:9/x.png" onerror="document.title=\'ran\'">'
        '<p id="late" style="color: #ff0000">x</p></body>',
    )
    opened(driver, address, foul)
    assert driver.title.startswith("Audit of support runs")
    assert (
        driver.execute_script("return getComputedStyle(document.getElementById('late')).color")
        == "rgb(26, 26, 26)"
    )
    assert driver.execute_script("return getComputedStyle(document.body).maxWidth") == "646px"
    assert len([e for e in driver.get_log("browser") if "Content Security Policy" in e["message"]]) >= 3


def test_the_skip_link_is_first_and_focus_shows(driver, address):
    opened(driver, address, render(made()))
    first = driver.execute_script("return document.querySelector('a, button, input, [tabindex]').className")
    assert first == "skip"
    shown = driver.execute_script(
        "const a = document.querySelector('.skip'); a.focus({focusVisible: true});"
        "const r = a.getBoundingClientRect(); return [r.top >= 0, getComputedStyle(a).outlineStyle]"
    )
    assert shown == [True, "solid"]


def test_targets_are_large_enough_or_far_enough_apart(driver, address):
    """WCAG 2.2, criterion 2.5.8: 24 by 24 pixels, or a circle of 24 around each that touches no other."""
    opened(driver, address, render(made()), 320)
    boxes = driver.execute_script(
        "return [...document.querySelectorAll('nav a, td a, figcaption a, .methods a')].map(a => {"
        "const r = a.getBoundingClientRect(); return [r.left, r.top + scrollY, r.width, r.height]})"
    )
    assert len(boxes) > 20
    middles = [(left + width / 2, top + height / 2) for left, top, width, height in boxes]
    for i, (x, y) in enumerate(middles):
        if boxes[i][2] >= 24 and boxes[i][3] >= 24:
            continue
        assert all(j == i or (x - a) ** 2 + (y - b) ** 2 >= 24**2 for j, (a, b) in enumerate(middles)), boxes[
            i
        ]


def pages_of(driver, tmp_path) -> list[str]:
    """The text of every page of the printed report."""
    printed = driver.execute_cdp_cmd("Page.printToPDF", {"preferCSSPageSize": True, "printBackground": True})
    file = tmp_path / "report.pdf"
    file.write_bytes(base64.b64decode(printed["data"]))
    reader = shutil.which("pdftotext")
    if reader is None:
        pytest.skip("no pdftotext here")
    text = subprocess.run(
        [reader, "-layout", str(file), "-"], capture_output=True, text=True, check=True
    ).stdout
    return text.split("\f")[:-1]


def test_the_summary_is_one_page_and_every_page_is_stamped(driver, address, tmp_path):
    opened(driver, address, render(made()))
    pages = pages_of(driver, tmp_path)
    assert "What happened to the runs" in pages[0]
    lines = [line.split() for line in pages[1].splitlines() if line.strip()]
    assert lines[1] == ["1", "Which", "runs", "are", "counted?"]
    assert not any("Finding. 66 records" in page for page in (pages[0], *pages[2:]))
    for number, page in enumerate(pages, start=1):
        assert "Internal – contains individual runs" in page
        assert "Report " in page
        assert page.strip().split("\n")[-1].strip() == str(number)
    assert "as CSV" not in "".join(pages)


def test_the_head_of_a_long_table_is_printed_on_every_page(driver, address, tmp_path):
    page = render(made(provenance={f"Line {i}": f"value {i}" for i in range(150)}))
    opened(driver, address, page)
    pages = pages_of(driver, tmp_path)
    with_rows = [text for text in pages[1:] if re.search(r"^\s*Line \d+", text, flags=re.MULTILINE)]
    assert len(with_rows) >= 3
    assert all("As used" in text for text in with_rows)
