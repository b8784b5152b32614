"""The certificate: one page with laws, examples, seed, versions and exemptions."""

from __future__ import annotations

import html.parser

import pytest

from plastic.report.certificate import TITLE, certificate
from tests.checking.reports import report_of

NAMES = ("Clean", "Exempt", "Needless", "HardCodedMilliseconds")
REPORTS = [report_of(name) for name in NAMES]


class Page(html.parser.HTMLParser):
    """Text and tags of a page; refuses tags that do not close in order."""

    def __init__(self, page: str) -> None:
        super().__init__()
        self.open: list[str] = []
        self.words: list[str] = []
        self.attributes: list[tuple[str, str | None]] = []
        self.feed(page)

    def handle_starttag(self, tag: str, attributes: list[tuple[str, str | None]]) -> None:
        self.attributes += attributes
        if tag != "meta":
            self.open.append(tag)

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        self.words.append(data)


@pytest.mark.parametrize("as_html", [False, True])
def test_a_page_holds_all_that_a_reader_needs(as_html: bool) -> None:
    page = certificate(REPORTS, html=as_html)
    text = "".join(Page(page).words) if as_html else page
    for report in REPORTS:
        wanted = [report.name, report.source, f"seed {report.seed}", "numpy", "hypothesis"]
        wanted += [v.law for v in report.verdicts] + [
            v.words for v in report.verdicts if not v.reason
        ]
        wanted += [v.reason for v in report.verdicts if v.reason]
        assert [word for word in wanted if word not in text] == []
    assert "this is no proof" in text
    assert "time_units fails: with all times 2 times as long" in text


def test_the_page_is_one_file_that_loads_nothing() -> None:
    page = Page(certificate(REPORTS, html=True))
    assert page.open == []
    assert {name for name, _ in page.attributes} <= {"lang", "charset", "class"}


def test_the_counts_are_told() -> None:
    assert "laws       3 hold\n" in certificate([REPORTS[0]])
    assert "laws       2 hold, 1 exempt\n" in certificate([REPORTS[1]])
    assert "laws       2 hold, 1 exempt without need\n" in certificate([REPORTS[2]])
    assert "laws       2 hold, 1 fail\n" in certificate([REPORTS[3]])


def test_the_text_starts_with_its_title_and_signs_are_escaped() -> None:
    assert certificate(REPORTS).startswith(f"{TITLE}\n===")
    page = certificate(REPORTS, html=True)
    assert "&#x27;times&#x27;: 2" in page
    assert "numbers={'times'" not in page


def test_the_same_report_gives_the_same_page() -> None:
    assert certificate(REPORTS) == certificate(REPORTS)
