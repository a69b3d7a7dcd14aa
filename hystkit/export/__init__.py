"""Files for the report: LaTeX to input, and everything about a design in one folder."""

from hystkit.export.folder import write_folder
from hystkit.export.fragment import tex, write_tex

__all__ = ["tex", "write_folder", "write_tex"]
