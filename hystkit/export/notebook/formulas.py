"""LaTeX in a page that has no script to set it: written as MathML, which browsers set natively."""

from __future__ import annotations

import html
import re
from collections.abc import Iterator, Mapping
from typing import Any
from xml.etree import ElementTree

from hystkit.base.errors import HystkitError
from hystkit.export.notebook.libraries import needed

#: Elements whose text is shown as it is.
_VERBATIM = "code|math|pre|script|style|svg|textarea"
_TAG = r"<[a-zA-Z/!](?:[^\"'>]|\"[^\"]*\"|'[^']*')*>"
_SKIPPED = re.compile(
    rf"<!--.*?-->|<(?P<kept>{_VERBATIM})\b.*?</(?P=kept)\s*>|{_TAG}", re.DOTALL | re.IGNORECASE
)
_MATH = re.compile(
    r"(?<!\\)\$\$(?P<block>.+?)(?<!\\)\$\$"
    r"|\\\[(?P<bracketed>.+?)\\\]"
    r"|\\\((?P<inline>.+?)\\\)"
    r"|(?P<environment>\\begin\{(?P<name>[a-z]+\*?)\}.+?\\end\{(?P=name)\})"
    # A dollar that stands before a blank or after one is money.
    r"|(?<![\\$\w])\$(?![\s$])(?P<short>[^$]+?)(?<![\s\\])\$(?![$\d])"
    r"|(?<![\\$\w])\$(?=\s)(?P<spaced>[^$]*[\\^_=][^$]*)(?<=\s)\$(?![$\d])",
    re.DOTALL,
)
_BLOCKS = ("block", "bracketed", "environment")
_INLINES = ("inline", "short", "spaced")
_STYLED = re.compile(r"^\s*\\displaystyle\b")
# What the converter does not know, in words that it does.
_WORDS = (
    (re.compile(r"\\(begin|end)\{(?:aligned|align|split|eqnarray\*?)\}"), r"\\\1{align*}"),
    (re.compile(r"\\(begin|end)\{(?:gathered|gather|equation|multline)\*?\}"), r"\\\1{gather*}"),
    (re.compile(r"\\mathrm\{\s*(\w)\s*\}"), r"\\text{\1}"),
    (re.compile(r"\\(?:nonumber|notag)\b|\\label\{[^{}]*\}"), ""),
)
_KEPT_ATTRIBUTES = frozenset(
    {
        *("accent", "columnalign", "columnspacing", "display", "displaystyle", "fence", "form"),
        *("linethickness", "lspace", "mathvariant", "maxsize", "minsize", "movablelimits"),
        *("rowspacing", "rspace", "scriptlevel", "separator", "stretchy", "symmetric", "width"),
    }
)

#: LaTeX, as it stands between its marks, to MathML that is better than the converter's.
Known = Mapping[str, str]


def set_formulas(page: str, known: Known | None = None, *, blocks_only: bool = False) -> str:
    """Write every formula in a piece of HTML as MathML.

    Parameters
    ----------
    page : str
        HTML with LaTeX between dollars, brackets or the words of an environment.
    known : mapping of str to str, optional
        MathML of formulas that need no conversion.
    blocks_only : bool, default False
        Whether a formula within a line is left as it is: there it may be part of a name.

    Returns
    -------
    str
        The same without LaTeX marks; code, scripts and drawings stay as they are.
    """

    def answer(found: re.Match[str]) -> str:
        inline = any(found[name] is not None for name in _INLINES)
        return found[0] if inline and blocks_only else _set(found, known or {})

    pieces = _pieces(page)
    return "".join(text if verbatim else _MATH.sub(answer, text) for verbatim, text in pieces)


def set_latex(text: str) -> str:
    """Write the LaTeX output of a cell as HTML.

    Parameters
    ----------
    text : str
        Formulas between their marks, and text around them.

    Returns
    -------
    str
        HTML, escaped.
    """
    # LaTeX of an output may stand on several lines, and its marks are sure.
    body = text.strip()
    if re.fullmatch(r"\$(?!\$)[^$]+\$", body):
        return formula(body[1:-1], block=bool(_STYLED.match(body[1:])))
    return set_formulas(html.escape(body, quote=False))


def formula(latex: str, *, block: bool) -> str:
    """Write one formula as MathML.

    Parameters
    ----------
    latex : str
        For math mode, without marks.
    block : bool
        Whether it stands on a line of its own.

    Returns
    -------
    str
        One ``math`` element; the LaTeX as code where it cannot be converted.
    """
    try:
        tree = _tree(latex, block=block)
    except HystkitError:
        raise
    except Exception:  # the converter has no common error of its own
        return f"<code>{html.escape(latex.strip(), quote=False)}</code>"
    text = ElementTree.tostring(tree, encoding="unicode", short_empty_elements=False)
    return displayed(text) if block else text


def displayed(mathml: str) -> str:
    """Put a formula on a line of its own.

    Parameters
    ----------
    mathml : str
        One ``math`` element.

    Returns
    -------
    str
        HTML; a formula that is wider than the page is moved in its own frame, by keys too.
    """
    return f'<span class="formula" tabindex="0">{mathml}</span>'


def _pieces(page: str) -> Iterator[tuple[bool, str]]:
    """Share HTML out into what is kept as it is, and text."""
    end = 0
    for found in _SKIPPED.finditer(page):
        yield False, page[end : found.start()]
        yield True, found[0]
        end = found.end()
    yield False, page[end:]


def _set(found: re.Match[str], known: Known) -> str:
    kind = next(name for name in (*_BLOCKS, *_INLINES) if found[name] is not None)
    latex = html.unescape(found[kind])
    if latex.strip() in known:
        return displayed(known[latex.strip()])
    return formula(latex, block=kind in _BLOCKS or bool(_STYLED.match(latex)))


def _tree(latex: str, *, block: bool) -> Any:
    if not _balanced(latex):
        raise ValueError("braces that do not match")
    for pattern, word in _WORDS:
        latex = pattern.sub(word, latex)
    convert = needed("latex2mathml.converter").convert_to_element
    root = convert(_STYLED.sub("", latex).strip(), display="block" if block else "inline")
    for element in root.iter():
        text = html.unescape(element.text or "")
        if element.tag == "mi" and text.startswith("\\"):
            raise ValueError(f"{text} is not known")
        element.text = text or None
        for name in set(element.attrib) - _KEPT_ATTRIBUTES:
            del element.attrib[name]
    return root


def _balanced(latex: str) -> bool:
    depth = 0
    for brace in re.findall(r"(?<!\\)[{}]", latex):
        depth += 1 if brace == "{" else -1
        if depth < 0:
            return False
    return depth == 0
