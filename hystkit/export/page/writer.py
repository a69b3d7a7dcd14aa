"""Write the live page to a file, or give it as a fragment to paste."""

from __future__ import annotations

import os
from collections.abc import Sequence
from dataclasses import dataclass
from html import escape
from pathlib import Path
from urllib.parse import quote

from hystkit.base.errors import Fault, InputError
from hystkit.base.fields import Field, Viewed
from hystkit.base.files import ANOTHER_NAME, check_free, write_text
from hystkit.circuit.design import Design
from hystkit.export.page.document import Page
from hystkit.export.page.static import static_fragment


@dataclass(frozen=True)
class WrittenPage(Viewed, os.PathLike[str]):
    """What was written, and what a server has to allow for it.

    Attributes
    ----------
    path : Path
        The page; this object can be used in its place.
    size : int
        Of all its files together [bytes].
    script_hash, style_hash : str
        Source expressions for a content-security policy: ``'sha256-...'`` of the inline script
        and style, or ``'self'`` where they stand in files of their own.
    policy : str
        The policy that the page carries itself.
    beside : tuple of Path
        Files that belong to the page; none where everything is inline.
    """

    path: Path
    size: int
    script_hash: str
    style_hash: str
    policy: str
    beside: tuple[Path, ...] = ()

    def __fspath__(self) -> str:
        """Return the path of the page."""
        return str(self.path)

    def _fields(self) -> Sequence[Field]:
        with_it = ", ".join(each.name for each in self.beside)
        return [
            Field("page", str(self.path)),
            *([Field("with it", with_it)] if with_it else []),
            Field("size", f"{self.size / 1000:.0f} kB"),
            Field("script-src", self.script_hash),
            Field("style-src", self.style_hash),
        ]


def write_page(
    design: Design,
    path: str | os.PathLike[str],
    *,
    overwrite: bool = False,
    separate_script: bool = False,
) -> WrittenPage:
    """Write the live page of a design: one HTML file that needs no kernel and no network.

    Parameters
    ----------
    design : Design
        What the page shows first; its form stays fixed, every value can be changed on the page.
    path : path
        File to write, ``.html`` or ``.htm``; folders above it are made too.
    overwrite : bool, default False
        Whether existing files may be replaced.
    separate_script : bool, default False
        Whether script and style become files of their own beside the page, for servers that
        allow nothing inline.

    Returns
    -------
    WrittenPage
        Path, size, and the hashes that a strict content-security policy has to name.

    Raises
    ------
    OutputExistsError
        If a file exists and `overwrite` is false; then nothing is written.
    InputError
        If the file name has another ending, or a folder above it is a file.

    Notes
    -----
    The same design gives the same bytes. With scripts blocked the page still shows the first
    pictures and all tables.
    """
    target = Path(path)
    if target.suffix.lower() not in (".html", ".htm"):
        raise InputError.of("this page", [_ending_fault(target)])
    page = Page(design)
    files = _separate(page, target) if separate_script else {target: standalone(page)}
    for file in files:
        check_free(file, ANOTHER_NAME, overwrite=overwrite)
    target.parent.mkdir(parents=True, exist_ok=True)
    for file, text in files.items():
        write_text(file, text, overwrite=overwrite)
    sources = _sources(page, separate=separate_script)
    return WrittenPage(
        target,
        sum(len(text.encode("utf-8")) for text in files.values()),
        *sources,
        page.policy(*sources),
        tuple(file for file in files if file != target),
    )


def page_fragment(design: Design, *, live: bool = True) -> str:
    """Give the live page as HTML to paste into another page.

    Parameters
    ----------
    design : Design
        What it shows first.
    live : bool, default True
        False for pages that strip scripts, styles and drawings: a picture, tables and LaTeX.

    Returns
    -------
    str
        One ``section`` element. Several of them stand on one page without touching each other
        or the page around them.
    """
    return Page(design).fragment() if live else static_fragment(design)


def page_frame(design: Design, *, height_px: int = 1200) -> str:
    """Give the live page as a frame that runs apart from the page around it.

    Parameters
    ----------
    design : Design
        What it shows first.
    height_px : int, default 1200
        Height of the frame [px].

    Returns
    -------
    str
        One ``iframe`` element that holds the whole page and grants it scripts, nothing else.
    """
    page = Page(design)
    return (
        f'<iframe sandbox="allow-scripts" title="{escape(page.title)}" '
        f'width="100%" height="{int(height_px)}" style="border:0" '
        f'srcdoc="{escape(standalone(page))}"></iframe>'
    )


def standalone(page: Page) -> str:
    """Write the document with script and style inline.

    Parameters
    ----------
    page : Page
        The page.

    Returns
    -------
    str
        HTML.
    """
    policy = page.policy(page.script_hash, page.style_hash)
    style = f"<style>{page.style}</style>"
    return page.document(policy, style, f"<script>{page.script}</script>")


def _separate(page: Page, target: Path) -> dict[Path, str]:
    script, style = (target.with_suffix(ending) for ending in (".js", ".css"))
    link, code = (escape(quote(file.name)) for file in (style, script))
    link = f'<link rel="stylesheet" href="{link}">'
    code = f'<script defer src="{code}"></script>'
    policy = page.policy("'self'", "'self'")
    return {target: page.document(policy, link, code), script: page.script, style: page.style}


def _sources(page: Page, *, separate: bool) -> tuple[str, str]:
    return ("'self'", "'self'") if separate else (page.script_hash, page.style_hash)


def _ending_fault(target: Path) -> Fault:
    return Fault(
        f"a page cannot be written as {target.suffix!r}.",
        asked=str(target),
        rule="the ending is .html or .htm",
        remedy=str(target.with_suffix(".html")),
    )
