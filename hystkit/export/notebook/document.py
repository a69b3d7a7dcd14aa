"""The published notebook as one HTML file that asks for nothing from anywhere."""

from __future__ import annotations

import re
from html import escape, unescape
from importlib.resources import files

from hystkit import __version__

#: Nothing is fetched; what runs stands in the page.
POLICY = "; ".join(
    [
        "default-src 'none'",
        "script-src 'unsafe-inline'",
        "style-src 'unsafe-inline'",
        "img-src data:",
        "font-src data:",
        "media-src data:",
        "base-uri 'none'",
        "form-action 'none'",
    ]
)
_HEADING = re.compile(r"<h1\b[^>]*>(.*?)</h1>", re.DOTALL)
_ANCHOR = re.compile(r'<a class="anchor-link".*?</a>', re.DOTALL)
_ALL = r"(?:[^\"'>]|\"[^\"]*\"|'[^']*')*"
_FETCHING = re.compile(
    # A script goes with what it holds, and is not searched for tags.
    rf"<(?P<script>script)\b(?P<told>{_ALL})>.*?</script\s*>"
    rf"|<(?P<tag>img|iframe|link|video|audio|source|embed|object)\b(?P<all>{_ALL})>"
    r"(?:\s*</iframe\s*>)?",
    re.IGNORECASE | re.DOTALL,
)
_ATTRIBUTE = re.compile(
    r"(?P<name>[^\s=\"'/]+)"
    r"(?:\s*=\s*(?:\"(?P<double>[^\"]*)\"|'(?P<single>[^']*)'|(?P<bare>[^\s\"'>]+)))?"
)
#: What stands in the page itself, or is made by it.
_HELD = ("data:", "#", "about:", "blob:")


def document(body: str, name: str) -> str:
    """Put written cells into a page.

    Parameters
    ----------
    body : str
        HTML of the cells.
    name : str
        Title of the page where the cells have no heading of the first order.

    Returns
    -------
    str
        One document; its policy keeps a browser from fetching anything for it.
    """
    style = files("hystkit.export.notebook").joinpath("document.css").read_text(encoding="utf-8")
    head = [
        '<meta charset="utf-8">',
        f'<meta http-equiv="Content-Security-Policy" content="{escape(POLICY)}">',
        '<meta name="viewport" content="width=device-width, initial-scale=1">',
        '<meta name="color-scheme" content="light dark">',
        f'<meta name="generator" content="hystkit {__version__}">',
        f"<title>{escape(title(body) or name)}</title>",
        f"<style>\n{style}</style>",
    ]
    lines = ["<!DOCTYPE html>", '<html lang="en">', "<head>", *head, "</head>"]
    return "\n".join([*lines, "<body>", "<main>", body, "</main>", "</body>", "</html>", ""])


def title(body: str) -> str:
    """Give the first heading of the first order.

    Parameters
    ----------
    body : str
        HTML of the cells.

    Returns
    -------
    str
        Its text; empty where there is none.
    """
    found = _HEADING.search(body)
    if found is None:
        return ""
    bare = re.sub(r"<[^>]*>", "", _ANCHOR.sub("", found[1]))
    return " ".join(unescape(bare).split())


def without_fetching(body: str) -> tuple[str, tuple[str, ...]]:
    """Replace what the page would have to fetch.

    Parameters
    ----------
    body : str
        HTML of the cells.

    Returns
    -------
    body : str
        The same with a link in place of each picture or frame that stands elsewhere, and without
        scripts and styles that do.
    addresses : tuple of str
        What was replaced, each once.
    """
    addresses: dict[str, None] = {}

    def answer(found: re.Match[str]) -> str:
        told = _attributes(found["told"] or found["all"] or "")
        address = next(filter(None, map(told.get, ("src", "href", "data"))), "")
        if not address or address.startswith(_HELD):
            return found[0]
        addresses[address] = None
        runs = address.lower().startswith("javascript:")
        if runs or found["script"] or found["tag"].lower() == "link":
            return ""
        words = told.get("alt") or told.get("title") or address
        return f'<a class="left-out" href="{escape(address)}">{escape(words)}</a>'

    return _FETCHING.sub(answer, body), tuple(addresses)


def _attributes(text: str) -> dict[str, str]:
    return {
        found["name"].lower(): unescape(
            found["double"] or found["single"] or found["bare"] or ""
        ).strip()
        for found in _ATTRIBUTE.finditer(text)
    }
