"""Longer documentation, shipped with the package."""
