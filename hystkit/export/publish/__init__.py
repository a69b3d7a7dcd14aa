"""A notebook for a team wiki: executed, and written so that it needs no kernel and no network."""

from hystkit.export.publish.publish import Published, publish

__all__ = ["Published", "publish"]
