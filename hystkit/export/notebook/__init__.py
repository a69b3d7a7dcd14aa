"""A notebook for readers without kernel and network: executed, and written down to be read."""

from hystkit.export.notebook.execute import PublishError
from hystkit.export.notebook.publish import Published, publish

__all__ = ["PublishError", "Published", "publish"]
