"""The report in a real browser: no errors, sorts, fits a phone, prints, asks no network.

Run with `-m browser`; without the marker these tests are not selected (see DEVELOPERS.md).
"""

from __future__ import annotations

import re
import sys
from pathlib import Path

import pytest

from campaign.ledger.adding import add_electrode
from campaign.ledger.database import open_database
from campaign.ledger.demonstration import build

sys.path.insert(0, str(Path(__file__).parent))
import driver

pytestmark = pytest.mark.browser

HOSTILE = '"><script>window.hit=1</script><img src=x onerror="window.hit=1"> $x$ é'
PHONE = 390


@pytest.fixture(scope="module")
def page(tmp_path_factory):
    from campaign.ledger.amending import amend
    from campaign.present.report.page import write_report

    folder = tmp_path_factory.mktemp("page")
    database = str(build(folder / "demo").database)
    opened = open_database(database)
    add_electrode(opened, "spare", "Na", {})
    amend(opened, "electrode", "hard carbon C", {"label": HOSTILE}, "a hostile name", "test")
    path = folder / "report.html"
    write_report(path, database)
    return path


@pytest.fixture(scope="module")
def window(tmp_path_factory, page):
    lacking = driver.missing()
    if lacking:
        pytest.fail(lacking)
    with driver.browser(tmp_path_factory.mktemp("profile")) as opened:
        opened.command("Network.enable", {})
        opened.command("Network.setBlockedURLs", {"urls": ["http://*", "https://*"]})
        opened.open(page)
        yield opened


def test_no_script_error_and_no_request(window, page):
    window.messages()
    window.screen(1200, 900, mobile=False)
    window.open(page)
    assert window.messages() == []
    assert window.run("return performance.getEntriesByType('resource').length") == 0
    assert window.run("return document.title") == "Campaign report"
    assert window.run("return document.querySelectorAll('svg').length") > 15


def test_a_hostile_label_is_text_and_no_more(window):
    assert window.run("return window.hit === undefined")
    assert window.run("return document.querySelectorAll('img').length") == 0
    headings = window.run("return Array.from(document.querySelectorAll('h3'), h => h.textContent)")
    assert HOSTILE in headings


def test_a_click_sorts_numbers_as_numbers_and_again_the_other_way(window):
    read = (
        "const t = document.querySelector('#summary').parentElement.querySelector('table');"
        "return Array.from(t.tBodies[0].rows, r => Number(r.cells[2].textContent))"
    )
    click = (
        "const t = document.querySelector('#summary').parentElement.querySelector('table');"
        "t.tHead.rows[0].cells[arguments[0]].querySelector('button').click();"
        "return t.tHead.rows[0].cells[arguments[0]].getAttribute('aria-sort')"
    )
    unsorted = window.run(read)
    assert window.run(click, 2) == "ascending"
    assert window.run(read) == sorted(unsorted) != unsorted
    assert window.run(click, 2) == "descending"
    assert window.run(read) == sorted(unsorted, reverse=True)
    assert window.run(click, 0) == "ascending"
    names = window.run(
        "const t = document.querySelector('#summary').parentElement.querySelector('table');"
        "return Array.from(t.tBodies[0].rows, r => r.cells[0].textContent)"
    )
    assert sorted(names, key=str.casefold) == names
    assert window.run("return document.querySelectorAll('[aria-sort]').length") == 1


def test_it_fits_the_width_of_a_phone(window, page):
    window.screen(PHONE, 844, mobile=True)
    window.open(page)
    assert window.run("return innerWidth") == PHONE
    assert window.run("return document.documentElement.scrollWidth") <= PHONE
    outside = window.run(
        "return Array.from(document.querySelectorAll('h1, h2, h3, h4, p, li, .wide, figure, nav'))"
        ".filter(e => e.getBoundingClientRect().right > innerWidth + 1)"
        ".map(e => e.outerHTML.slice(0, 80))"
    )
    assert outside == []
    window.screen(1200, 900, mobile=False)


def test_it_prints_on_paper(window):
    printed = window.printed()
    assert printed.startswith(b"%PDF-")
    pages = len(re.findall(rb"/Type\s*/Page\b", printed))
    assert 5 < pages < 80
    assert window.messages() == []
