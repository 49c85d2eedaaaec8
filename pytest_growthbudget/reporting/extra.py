"""The extra that the page needs: whether it is there, and how to install it."""

from __future__ import annotations

import importlib.util

LIBRARIES = ("jinja2", "matplotlib")


def missing_libraries() -> str:
    """What the page cannot be drawn without, and how to install it; "" where all is there."""
    missing = [name for name in LIBRARIES if importlib.util.find_spec(name) is None]
    if not missing:
        return ""
    return f'the page needs {" and ".join(missing)}, not installed here: pip install "pytest_growthbudget[page]"'
