"""The one script of a page: tables, the law of the form, and the runtime."""

from __future__ import annotations

import base64
import hashlib
import json
from functools import cache, lru_cache
from importlib.resources import files

from hystkit.circuit.stage import Stage
from hystkit.export.page.model import form_key, tables
from hystkit.figures.theme import THEMES, Theme
from hystkit.symbolic.javascript import law_script
from hystkit.symbolic.law import derive

_SCRIPTS = ("numbers", "circuit", "pen", "marks", "ruler", "loop", "rows", "live")
_STYLES = ("page", "pictures")
_COLOURS = ("text", "muted", "line", "faint", "upper", "lower", "band", "signal", "warning")


@lru_cache(maxsize=64)
def page_script(stage: Stage) -> str:
    """Write the script of a page.

    Parameters
    ----------
    stage : Stage
        The form; pages of the same form have the same script, whatever their values.

    Returns
    -------
    str
        JavaScript that starts every page of this form in the document that holds it.
    """
    constants = json.dumps(tables(), ensure_ascii=False, separators=(",", ":"))
    head = [
        f'const FORM = "{form_key(stage)}";',
        f"const TABLES = {constants};",
        f"const LAW = {law_script(derive(stage))};",
    ]
    body = [_asset(f"{name}.js") for name in _SCRIPTS]
    text = "\n".join(["(function () {", '"use strict";', *head, *body, "}());"])
    # Inside a script element these would end it or open another one; no part of ours has them.
    if "</" in text or "<!--" in text:
        raise AssertionError("the script cannot stand in a page as it is")
    return text


@cache
def page_style() -> str:
    """Write the style sheet of a page; every rule is confined to it.

    Returns
    -------
    str
        CSS with the colours of the figures, light and dark.
    """
    light, dark = (_variables(THEMES[name]) for name in ("light", "dark"))
    text = "\n".join(_asset(f"{name}.css") for name in _STYLES)
    return text.replace("/* light */", light).replace("/* dark */", dark)


def digest(text: str) -> str:
    """Give the source expression of a content-security policy for an inline script or style.

    Parameters
    ----------
    text : str
        Content of the element.

    Returns
    -------
    str
        Such as ``'sha256-...'``, with its quotes.
    """
    hashed = hashlib.sha256(text.encode("utf-8")).digest()
    return f"'sha256-{base64.b64encode(hashed).decode()}'"


def _asset(name: str) -> str:
    return files("hystkit.export.page.assets").joinpath(name).read_text(encoding="utf-8").strip()


def _variables(theme: Theme) -> str:
    pairs = {name: getattr(theme, name) for name in _COLOURS}
    pairs |= {"paper": theme.background, "common": theme.common_mode}
    return "".join(f"--hk-{name}:{value};" for name, value in pairs.items()) + (
        f"--hk-band-alpha:{theme.band_alpha};"
    )
