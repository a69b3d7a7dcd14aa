"""Files for reports and wikis: LaTeX to input, a folder about a design, a notebook to read."""

from hystkit.export.folder import write_folder
from hystkit.export.fragment import tex, write_tex
from hystkit.export.notebook.publish import publish

__all__ = ["publish", "tex", "write_folder", "write_tex"]
