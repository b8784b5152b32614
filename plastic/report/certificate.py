"""The certificate of a check: one page that says what was tried and what held."""

from __future__ import annotations

from collections.abc import Sequence
from html import escape

from plastic.checking.shown import MARKS, verdict_lines
from plastic.checking.verdicts import Report, Verdict
from plastic.report.grid import Grid

TITLE = "Certificate of laws"
SAYS = (
    "Examples are drawn at random from what the part declares, and the first that breaks a law is "
    "reduced to the smallest. A law that holds was not broken by any example that was tried; this "
    "is no proof, and says nothing about whether a rule describes a synapse."
)
STYLE = """
body { font: 15px/1.45 Georgia, serif; max-width: 60em; margin: 2em auto; padding: 0 1em; }
table { border-collapse: collapse; width: 100%; margin: 0.6em 0 1.4em; }
th, td { text-align: left; vertical-align: top; padding: 0.2em 0.8em 0.2em 0; }
th, tr:last-child td { border-bottom: 1px solid #444; }
th { border-top: 1px solid #444; }
pre { font: 12px/1.35 monospace; background: #f4f4f2; padding: 0.8em; overflow-x: auto; }
.fails { color: #a00; font-weight: bold; }
"""


def certificate(reports: Sequence[Report], *, html: bool = False) -> str:
    """Return one page on what was checked: laws, examples, seed, versions, exemptions.

    Parameters
    ----------
    reports : sequence of Report
    html : bool
        One file without anything to load; otherwise plain text.
    """
    return _html(reports) if html else _text(reports)


def _head(report: Report) -> list[tuple[str, str]]:
    libraries = ", ".join(f"{name} {version}" for name, version in report.versions.items())
    counts = [
        (sum(v.status == status for v in report.verdicts), word)
        for status, word in (
            ("holds", "hold"), ("fails", "fail"), ("exempt", "exempt"),
            ("needless", "exempt without need"),
        )
    ]  # fmt: skip
    return [
        (report.about, report.name),
        ("laws", ", ".join(f"{count} {word}" for count, word in counts if count)),
        ("examples", f"{report.examples} of each law, seed {report.seed}"),
        ("source", f"sha256 {report.source}"),
        ("made with", libraries),
    ]


def _laws(report: Report) -> list[list[str]]:
    """Return the rows of the laws that had something to say."""
    return [
        [v.law, MARKS[v.status], str(v.examples), v.words]
        for v in report.verdicts
        if v.status != "idle"
    ]


def _reasons(report: Report) -> list[list[str]]:
    return [
        [v.law, "exempt" if v.status in ("exempt", "needless") else "not applied", v.reason]
        for v in report.verdicts
        if v.reason
    ]


COLUMNS = (["law", "verdict", "examples", "in words"], ["law", "", "reason"])


def _text(reports: Sequence[Report]) -> str:
    lines = [TITLE, "=" * len(TITLE), "", SAYS]
    for report in reports:
        lines += ["", *(f"{name:<10} {value}" for name, value in _head(report)), ""]
        for columns, rows in zip(COLUMNS, (_laws(report), _reasons(report)), strict=True):
            if rows:
                lines += [Grid("", columns, rows).plain(), ""]
        for verdict in report.failures:
            lines += [*verdict_lines(verdict), ""]
    return "\n".join(lines).rstrip() + "\n"


def _html(reports: Sequence[Report]) -> str:
    body = [f"<h1>{TITLE}</h1>", f"<p>{escape(SAYS)}</p>"]
    for report in reports:
        body.append(f"<h2>{escape(report.name)}</h2>")
        body.append(_table([], [list(pair) for pair in _head(report)]))
        for columns, rows in zip(COLUMNS, (_laws(report), _reasons(report)), strict=True):
            if rows:
                body.append(_table(columns, rows))
        body += [_failure(verdict) for verdict in report.failures]
    return (
        '<!DOCTYPE html>\n<html lang="en">\n<head>\n<meta charset="utf-8">\n'
        f"<title>{TITLE}</title>\n<style>{STYLE}</style>\n</head>\n<body>\n"
        + "\n".join(body)
        + "\n</body>\n</html>\n"
    )


def _failure(verdict: Verdict) -> str:
    return f"<pre>{escape(chr(10).join(verdict_lines(verdict)))}</pre>"


def _table(columns: Sequence[str], rows: Sequence[Sequence[str]]) -> str:
    head = "".join(f"<th>{escape(name)}</th>" for name in columns)
    lines = [f"<tr>{head}</tr>"] if columns else []
    for row in rows:
        marked = any(cell in (MARKS["fails"], MARKS["needless"]) for cell in row)
        kind = ' class="fails"' if marked else ""
        lines.append(f"<tr{kind}>{''.join(f'<td>{escape(cell)}</td>' for cell in row)}</tr>")
    return "<table>\n" + "\n".join(lines) + "\n</table>"
