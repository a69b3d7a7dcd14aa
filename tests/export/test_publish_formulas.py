"""LaTeX in a published page becomes MathML, or stays readable; nothing else is touched."""

from __future__ import annotations

import pytest

from hystkit.export.notebook.document import document, title, without_fetching
from hystkit.export.notebook.formulas import formula, set_formulas, set_latex
from tests.export.notebooks import readable


@pytest.mark.parametrize(
    ("source", "shown"),
    [
        ("<p>$x_1$ and $y$</p>", 2),
        ("<p>$$x$$ $$y$$</p>", 2),
        (r"<p>\(x\) \[y\]</p>", 2),
        (r"\begin{equation}x = 1\end{equation}", 1),
        (r"$$\begin{aligned} a &amp;= b \\ &amp;\quad + \mathrm{c} \end{aligned}$$", 1),
        ("$ a_b = c $", 1),
        ("costs $5 and $6", 0),
        ("a $5 part, a $6 part", 0),
        (r"escaped \$x\$", 0),
        ("<code>$x$</code><pre>$y$</pre>", 0),
        ("<script>const a = '$x$'</script><style>$x$</style>", 0),
        ("<img alt=\"$x$ > $y$\" title='$z$'>", 0),
        ("<!-- $x$ -->", 0),
    ],
)
def test_formulas_are_found_where_they_are(source: str, shown: int) -> None:
    page = set_formulas(source)
    assert page.count("<math") == shown
    if not shown:
        assert page == source
    else:
        assert "$" not in readable(page)
        assert "\\" not in readable(page)


@pytest.mark.parametrize(
    "latex",
    [r"\frac{a", "a}", r"\unknown x", r"\sqrt", r"\SI{3}{V}", "a_{1_2}_3", "x^a^b"],
)
def test_latex_that_cannot_be_converted_is_shown_as_code(latex: str) -> None:
    page = set_formulas(f"<p>${latex}$</p>")
    assert page == f"<p><code>{latex}</code></p>"


@pytest.mark.parametrize(
    "latex",
    [
        r"\text{<script>alert(1)</script>}",
        r"\text{&lt;img src=x onerror=alert(1)&gt;}",
        r"\mathrm{<b>}",
        r"\href{javascript:alert(1)}{x}",
        r"\style{color:red}{x}",
        "x < y > z",
    ],
)
def test_latex_brings_no_markup_of_its_own(latex: str) -> None:
    for page in (formula(latex, block=True), formula(latex, block=False), set_latex(f"${latex}$")):
        for bad in ("<script", "<img", "<b>", "javascript", "style=", "color"):
            assert bad not in page.replace("<code>" + latex, "")


def test_upright_letters_and_units_stay_upright() -> None:
    assert "<mtext>V</mtext>" in formula(r"2.5\,\mathrm{V}", block=False)


def test_known_formula_is_not_converted() -> None:
    page = set_formulas("<p>$$ a &lt; b $$</p>", {"a < b": "<math>own</math>"})
    assert "<math>own</math>" in page


def test_name_between_dollars_stays_where_only_blocks_are_set() -> None:
    assert set_formulas("<b>$R_1$</b> $$x$$", blocks_only=True).startswith("<b>$R_1$</b> <span")


def test_latex_output_may_hold_text() -> None:
    page = set_latex("$$x$$ is <less> than $y$")
    assert page.count("<math") == 2
    assert "is &lt;less&gt; than" in page


# -- the page around -------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("source", "shown", "addresses"),
    [
        ('<img alt="a > b" src=x.png>', '<a class="left-out" href="x.png">a &gt; b</a>', ["x.png"]),
        ('<script src="http://a/b.js">x</script>b', "b", ["http://a/b.js"]),
        ("<iframe src='//a/b'></iframe>", '<a class="left-out" href="//a/b">//a/b</a>', ["//a/b"]),
        ("<link rel=stylesheet href=a.css>", "", ["a.css"]),
        ('<img src="JavaScript:x">', "", ["JavaScript:x"]),
        ('<img src="data:image/png;base64,AA">', None, []),
        ('<script>var a = "<img src=q>"</script>', None, []),
        ('<iframe srcdoc="<img src=q>"></iframe>', None, []),
        ('<a href="https://example.org">link</a>', None, []),
    ],
)
def test_what_would_be_fetched_is_replaced(
    source: str, shown: str | None, addresses: list[str]
) -> None:
    assert without_fetching(source) == (source if shown is None else shown, tuple(addresses))


def test_title_is_the_first_heading_as_text() -> None:
    body = '<h2>b</h2><h1 id="x">A &lt;b&gt; <em>c</em><a class="anchor-link" href="#x">¶</a></h1>'
    assert title(body) == "A <b> c"
    assert "<title>A &lt;b&gt; c</title>" in document(body, "name")
    assert "<title>a&lt;b</title>" in document("", "a<b")
