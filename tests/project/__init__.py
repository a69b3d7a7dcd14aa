"""Checks of the project itself: layers, names, folder, documentation."""
