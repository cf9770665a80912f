"""The page: one HTML file that asks for nothing from outside, made from results.json alone."""

from __future__ import annotations

import base64
import hashlib
import re

from markupsafe import Markup

from outcomes import resources
from outcomes.report.codec import report_from_json, report_id, results_json
from outcomes.report.method_text import methods_used, references
from outcomes.report.model import Report
from outcomes.report.page import Page
from outcomes.report.sandbox import sandbox
from outcomes.report.stamp import stamp

_COMMENT = re.compile(r"/\*.*?\*/", re.DOTALL)


def render(report: Report) -> str:
    """The report as HTML. It goes through results.json, so the page shows what that holds and no more."""
    return render_json(results_json(report))


def render_json(text: str) -> str:
    """The page of a results.json, the same bytes as `render` gave when it was written."""
    report = report_from_json(text)
    templates = dict(resources.report_files("templates"))
    identity = report_id(text)
    style = compact(templates["style.css"]) + running_head(stamp(report.profile), identity)
    page = sandbox(templates).get_template("page.html.j2")
    return page.render(
        page=Page(report),
        report=report,
        stamp=stamp(report.profile),
        identity=identity,
        style=Markup(style),
        policy=policy(style),
        methods=methods_used(report),
        references=references(report),
    )


def compact(style: str) -> str:
    """The style sheet without comments and outer space. It has no sign that could end the block."""
    text = _COMMENT.sub("", style).strip()
    if "<" in text:
        raise ValueError("a style sheet has no use for a less-than sign")
    return text


def running_head(words: str, identity: str) -> str:
    """Style for the head and foot of every printed page: the profile, the report's id, the page number.

    Both texts are of our own making; no text of the data or of the user may enter a style block.
    """
    return (
        f'@page{{@top-left{{content:"{words}"}}@top-right{{content:"Report {identity}"}}'
        "@bottom-right{content:counter(page)}}"
    )


def policy(style: str) -> str:
    """The content policy: nothing may be fetched or run, and only this style block applies."""
    digest = base64.b64encode(hashlib.sha256(style.encode("utf-8")).digest()).decode("ascii")
    return (
        f"default-src 'none'; style-src 'sha256-{digest}'; img-src data:; base-uri 'none'; form-action 'none'"
    )
