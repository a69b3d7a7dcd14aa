"""Read README.md: its commands, its example and what that prints.

``python -m tests.project.readme 2`` prints the second command, for scripts.
"""

from __future__ import annotations

import re
import sys

from tests.project.source import ROOT

TEXT = (ROOT / "README.md").read_text(encoding="utf-8")


def blocks(language: str, text: str = TEXT) -> list[str]:
    """The fenced blocks of one language, in order."""
    pattern = rf"^```{re.escape(language)}[ \t]*\n(.*?)^```[ \t]*$"
    return re.findall(pattern, text, flags=re.DOTALL | re.MULTILINE)


def commands(text: str = TEXT) -> list[str]:
    """The lines of every fenced ``sh`` block, in order."""
    lines = "".join(blocks("sh", text)).splitlines()
    return [line for line in lines if line.strip() and not line.startswith("#")]


def paragraphs(text: str = TEXT) -> list[str]:
    """What blank lines separate, before the first fenced block."""
    return [part.strip() for part in re.split(r"\n\s*\n", text.split("```")[0]) if part.strip()]


if __name__ == "__main__":
    print(commands()[int(sys.argv[1]) - 1])
