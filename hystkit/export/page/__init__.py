"""The live page: one file with its own arithmetic, for readers without a kernel."""

from hystkit.export.page.writer import WrittenPage, page_fragment, page_frame, write_page

__all__ = ["WrittenPage", "page_fragment", "page_frame", "write_page"]
