"""Findings of a review as HTML: what needs attention in one line, or all of them in a table."""

from __future__ import annotations

import html
import math

from hystkit.base.quantity import show
from hystkit.review.finding import SIGNS, Finding, Review

#: Severities that are told in words under the ruler; of the others there is only the number.
TOLD = ("fault", "warning")


def line(found: Review) -> str:
    """Write a review in one line.

    Parameters
    ----------
    found : Review
        Of a design.

    Returns
    -------
    str
        HTML, everything escaped: faults and warnings with their text, how many checks pass, and
        how many notes there are.
    """
    told = [_piece(f.severity, f.name, f.text) for f in found if f.severity in TOLD]
    passes, notes = found.count("pass"), found.count("note")
    if passes:
        told.append(_piece("pass", "", f"{passes} check{'s pass' if passes > 1 else ' passes'}"))
    if notes:
        told.append(_piece("note", "", f"{notes} note{'s' * (notes > 1)}"))
    return " ".join(told)


def remarks(found: Review) -> tuple[str, ...]:
    """Write what needs attention, as sentences for a plain output.

    Parameters
    ----------
    found : Review
        Of a design.

    Returns
    -------
    tuple of str
        One for each fault and warning.
    """
    return tuple(_sentence(f) for f in found if f.severity in TOLD)


def all_remarks(found: Review) -> tuple[str, ...]:
    """Write all findings, as sentences for a plain output.

    Parameters
    ----------
    found : Review
        Of a design.

    Returns
    -------
    tuple of str
        The worst first.
    """
    return tuple(_sentence(f) for f in found)


def findings_table(found: Review) -> str:
    """Write a review as an HTML table.

    Parameters
    ----------
    found : Review
        Of a design.

    Returns
    -------
    str
        Everything escaped; a row for each finding, the worst first.
    """
    heading = "".join(
        f'<th scope="col">{name}</th>' for name in ("check", "found", "margin", "to change")
    )
    rows = "".join(
        f'<tr class="hystkit-{f.severity}-line"><th scope="row">{_sign(f.severity)} '
        f"{html.escape(f.name)}</th><td>{html.escape(f.text)}</td>"
        f"<td>{html.escape(margin(f))}</td><td>{html.escape(f.remedy)}</td></tr>"
        for f in found
    )
    return f"<table><thead><tr>{heading}</tr></thead><tbody>{rows}</tbody></table>"


def margin(finding: Finding) -> str:
    """Write the margin of a finding.

    Parameters
    ----------
    finding : Finding
        Of a review.

    Returns
    -------
    str
        With its unit; empty where there is none.
    """
    return "" if math.isnan(finding.margin) else show(finding.margin, finding.unit, 3)


def _piece(severity: str, name: str, text: str) -> str:
    said = f"<b>{html.escape(name)}:</b> " if name else ""
    return (
        f'<span class="hystkit-finding hystkit-{severity}-line">{_sign(severity)} '
        f"{said}{html.escape(text)}</span>"
    )


def _sign(severity: str) -> str:
    """Write the sign of a severity, and its name for those who do not see it."""
    return (
        f'<b aria-hidden="true">{SIGNS[severity]}</b><span class="hystkit-kind">{severity}: </span>'
    )


def _sentence(finding: Finding) -> str:
    sign = SIGNS[finding.severity]
    remedy = f" ({finding.remedy})" if finding.remedy else ""
    return f"{sign} {finding.severity}, {finding.name}: {finding.text}{remedy}"
