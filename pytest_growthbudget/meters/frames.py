"""Whose code counts as a step of the body.

Not counted are the frames of the machinery around the body: this package, pytest and its relatives, and
coverage. Nor is the book-keeping of `threading`, `queue`, `concurrent.futures` and `import`, since the path
it takes depends on which thread comes first, or on what was imported before: the same input would not give
the same count. What they call counts again: a thread's target, a task, the code of a module that the body
imports.
"""

from __future__ import annotations

import concurrent.futures
import functools
import importlib
import importlib.util
import os
import queue
import threading
from types import ModuleType

_MACHINERY = ("_pytest", "pytest", "pluggy", "xdist", "execnet", "coverage", "pytest_cov")


@functools.cache
def counted(filename: str) -> bool:
    """Whether code compiled from `filename` (a code object's `co_filename`) counts."""
    if filename.startswith("<frozen importlib"):
        return False
    path = os.path.normcase(os.path.abspath(filename))
    return not (path in _FILES or path.startswith(_folders()))


def _file(module: ModuleType) -> str:
    return os.path.normcase(os.path.abspath(module.__file__ or ""))


def _folder(file: str) -> str:
    return os.path.normcase(os.path.join(os.path.dirname(os.path.abspath(file)), ""))


_FILES = frozenset(map(_file, (threading, queue)))


@functools.cache
def _folders() -> tuple[str, ...]:
    """The folders of the machinery, each with a separator at its end."""
    folders = [os.path.join(os.path.dirname(_folder(__file__)[:-1]), "")]
    folders += [_folder(_file(package)) for package in (concurrent.futures, importlib)]
    for name in _MACHINERY:
        try:
            spec = importlib.util.find_spec(name)
        except ValueError:  # a module in sys.modules without a spec
            continue
        if spec is not None and spec.origin is not None and spec.submodule_search_locations is not None:
            folders.append(_folder(spec.origin))
    return tuple(folders)
