"""The report without a browser: what it holds, that nothing in it can act, its refusals."""

from __future__ import annotations

import re
from html.parser import HTMLParser

import pytest
from typer.testing import CliRunner

from campaign.cli.main import app
from campaign.errors import Refused
from campaign.ledger.demonstration import build
from campaign.present.report.markup import Html, tag, text
from campaign.present.report.page import report_path, write_report

RUN = CliRunner()
VOID = {"meta", "br", "hr", "path", "use", "rect"}


class Tags(HTMLParser):
    """Checks that elements are closed in the order they were opened."""

    def __init__(self) -> None:
        super().__init__()
        self.open: list[str] = []
        self.ids: list[str] = []
        self.links: list[str] = []

    def handle_starttag(self, name, attributes):
        found = dict(attributes)
        self.ids += [found["id"]] if "id" in found else []
        self.links += [found[key] for key in ("href", "src", "xlink:href") if key in found]
        if name not in ("meta", "br", "hr"):
            self.open.append(name)

    def handle_startendtag(self, name, attributes):
        self.handle_starttag(name, attributes)
        if name not in ("meta", "br", "hr"):
            self.open.pop()

    def handle_endtag(self, name):
        assert self.open and self.open[-1] == name, (self.open[-3:], name)
        self.open.pop()


@pytest.fixture(scope="module")
def written(tmp_path_factory):
    folder = tmp_path_factory.mktemp("report")
    database = str(build(folder / "demo").database)
    path = folder / "report.html"
    content = write_report(path, database)
    return path.read_text(encoding="utf-8"), content, database


def test_it_is_well_formed_and_needs_nothing_else(written):
    page, _, _ = written
    tags = Tags()
    tags.feed(page)
    assert tags.open == []
    assert len(tags.ids) == len(set(tags.ids))
    inside = [link for link in tags.links if link.startswith("#")]
    assert inside == tags.links
    assert {link[1:] for link in inside} <= set(tags.ids)
    assert "default-src 'none'" in page


@pytest.mark.parametrize(
    "part",
    ["Summary", "Evidence", "Coverage", "Next work", "Criteria", "Left out", "Cautions", "Journal"],
)
def test_every_part_is_there(written, part):
    assert re.search(rf"<h2 id=\"[a-z-]+\">{part}</h2>", written[0])


def test_it_tells_verdicts_left_out_cautions_and_head(written):
    page, content, _ = written
    for row in content.explanations.values():
        assert row["electrode"] in page and row["text"] in page
    assert "3 measurements: withdrawn" in page
    assert content.head["hash"] in page
    assert "hydrogen fluoride" in page
    assert "decide; this program proposes and does not authorise" in page
    assert page.count("<svg") >= 2 + sum(len(found) for found in content.trends.values())


def test_text_becomes_markup_nowhere():
    shown = tag("td", "<b>&\"'", Html("<i>ok</i>"), title='"><x')
    assert shown == "<td title=\"&quot;&gt;&lt;x\">&lt;b&gt;&amp;&quot;&#x27;<i>ok</i></td>"
    assert text(None) == ""


@pytest.mark.parametrize("name", ["report", "report.pdf", "report.html.gz"])
def test_other_endings_are_refused(name):
    with pytest.raises(Refused, match=r"ends in \.html"):
        report_path(name)


def test_a_filter_is_named_and_an_empty_campaign_reported(written, tmp_path, monkeypatch):
    monkeypatch.setenv("CAMPAIGN_DB", written[2])
    path = tmp_path / "one.html"
    done = RUN.invoke(app, ["report", str(path), "--electrode", "Prussian white D"])
    assert done.exit_code == 0 and "18 measurements" in done.output
    page = path.read_text(encoding="utf-8")
    assert "--electrode Prussian white D" in page and "NFM film A" not in page
    fresh = tmp_path / "fresh.sqlite"
    monkeypatch.setenv("CAMPAIGN_DB", str(fresh))
    assert RUN.invoke(app, ["init"]).exit_code == 0
    assert RUN.invoke(app, ["report", str(path)]).exit_code == 0
    assert "There are no measurements." in path.read_text(encoding="utf-8")
    assert [file.name for file in tmp_path.glob(".one*")] == []
