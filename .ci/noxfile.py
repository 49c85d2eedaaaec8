"""The matrix: `nox -f .ci/noxfile.py`, for one session `-s oldest`, to see them all `-l`.

Interpreters that are not on the path are skipped; `.ci/run` takes those it finds on the machine.
"""

from __future__ import annotations

from pathlib import Path

import nox

nox.needs_version = ">=2024.4"
nox.options.default_venv_backend = "venv"
nox.options.error_on_missing_interpreters = False
nox.options.sessions = ["tests", "pytests", "oldest", "newest", "installed"]

ROOT = Path(__file__).resolve().parent.parent
CPYTHONS = ["3.10", "3.11", "3.12", "3.13", "3.14"]
PYTESTS = ["7.4", "8.0", "8.1", "8.2", "8.3", "8.4", "9.0"]
OLDEST = [
    "pytest==7.4.0",
    "pluggy==1.2.0",
    "numpy==1.26.0",
    "scipy==1.11.1",
    "tomli==2.0.0",
    "pytest-xdist==3.5.0",
    "hypothesis==6.100.0",
    "jinja2==3.1.0",
    "matplotlib==3.8.0",
    "pyparsing==3.1.0",  # later ones warn of what matplotlib 3.8 uses
]
NEWEST = ["pytest", "pluggy", "numpy", "scipy", "matplotlib", "jinja2", "hypothesis", "pytest-xdist"]


def suite(session: nox.Session, *versions: str) -> None:
    """Install the project with its tests and these versions, and run the tests that are not slow."""
    session.chdir(ROOT)
    session.install("-e", ".[test]", *versions)
    session.run("python", "-m", "pytest", "-q", "-p", "no:cacheprovider", "-m", "not slow", *session.posargs)


@nox.session(python=CPYTHONS)
def tests(session: nox.Session) -> None:
    """Each CPython."""
    suite(session)


@nox.session(python="3.11")
@nox.parametrize("pytest", PYTESTS)
def pytests(session: nox.Session, pytest: str) -> None:
    """Each minor version of pytest."""
    suite(session, f"pytest=={pytest}.*")


@nox.session(python="3.10")
def oldest(session: nox.Session) -> None:
    """The oldest of everything together."""
    suite(session, *OLDEST)


@nox.session(python="3.13")
def newest(session: nox.Session) -> None:
    """The newest of everything together, releases to come included."""
    suite(session, "--pre", "--upgrade", *NEWEST)


@nox.session(python="3.12")
def installed(session: nox.Session) -> None:
    """The wheel that the source distribution builds, away from the source tree."""
    session.chdir(ROOT)
    made = Path(session.create_tmp()).resolve()
    session.install("build")
    session.run("python", "-m", "build", "--outdir", str(made), ".")
    session.install(str(max(made.glob("*.whl"))))
    session.chdir(made)
    session.run("python", "-m", "pytest", "-q", "-p", "no:cacheprovider", str(ROOT / "sample_project"))
