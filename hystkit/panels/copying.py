"""Buttons that copy a text with one click, without a round trip to the kernel."""

from __future__ import annotations

import html
from typing import Any

from hystkit.panels.desk import Desk

# Where a page may not use the clipboard, a hidden field and the old command do it.
_HANDLER = """
var b=this,t=b.dataset.text,say=function(m){var s=b.nextElementSibling;s.textContent=m;
setTimeout(function(){s.textContent=''},1800)},
old=function(){var a=document.createElement('textarea');a.value=t;a.style.position='fixed';
a.style.opacity=0;document.body.appendChild(a);a.select();var ok=false;
try{ok=document.execCommand('copy')}catch(e){}a.remove();b.focus();
say(ok?'copied':'not allowed here')};
if(navigator.clipboard&&window.isSecureContext){
navigator.clipboard.writeText(t).then(function(){say('copied')},old)}else{old()}
""".replace("\n", "")


class CopyButton:
    """A button that copies a text and says so.

    Parameters
    ----------
    desk : Desk
        Of the panel.
    label : str
        What stands on the button, plain text.
    says : str
        Its accessible name.
    """

    def __init__(self, desk: Desk, label: str, says: str) -> None:
        self._label = label
        self._says = says
        self._text: str | None = None
        self.widget: Any = desk.kit.label("", "copy")

    @property
    def text(self) -> str:
        """What a click copies."""
        return self._text or ""

    def show(self, text: str) -> None:
        """Set what a click copies.

        Parameters
        ----------
        text : str
            Any text.
        """
        if text != self._text:
            self._text = text
            self.widget.value = copy_button(self._label, self._says, text)


def copy_button(label: str, says: str, text: str) -> str:
    """Write the HTML of a button that copies a text.

    Parameters
    ----------
    label, says : str
        What stands on the button, and its accessible name; plain text.
    text : str
        What is copied, of any content.

    Returns
    -------
    str
        HTML with everything escaped.
    """
    # A line end inside an attribute would reach the clipboard as it is, but not every sanitiser.
    held = html.escape(text, quote=True).replace("\n", "&#10;")
    name = html.escape(says, quote=True)
    handler = html.escape(_HANDLER, quote=True)
    return (
        f'<button type="button" title="{name}" aria-label="{name}" data-text="{held}" '
        f'onclick="{handler}">{html.escape(label)}</button>'
        '<span class="hystkit-said" role="status"></span>'
    )
