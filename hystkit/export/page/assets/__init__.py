"""Script and style of the live page, as files to be put together."""
