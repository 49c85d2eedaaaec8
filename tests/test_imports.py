"""A run without budgets must not pay for numpy and scipy, and every module imports without a warning."""

from __future__ import annotations

import subprocess
import sys
from importlib.util import find_spec
from pathlib import Path

import pytest

import pytest_growthbudget

PACKAGE = Path(pytest_growthbudget.__file__).parent
HEAVY = "('numpy', 'scipy', 'jinja2', 'matplotlib')"
LIGHT = [
    "pytest_growthbudget",
    "pytest_growthbudget.plugin",
    "pytest_growthbudget.settings",
    "pytest_growthbudget.running.trial",
]
LIGHT += ["pytest_growthbudget.bounds.budget", "pytest_growthbudget.reporting.wire", "pytest_growthbudget.__main__"]


def run(code: str) -> str:
    done = subprocess.run([sys.executable, "-W", "error", "-c", code], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    return done.stdout.strip()


@pytest.mark.parametrize("module", LIGHT)
def test_what_a_run_without_budgets_imports_is_light(module: str) -> None:
    assert run(f"import sys, {module}; print([name for name in {HEAVY} if name in sys.modules])") == "[]"


def test_a_run_without_budgets_imports_nothing_heavy_and_little_of_this_package(pytester: pytest.Pytester) -> None:
    pytester.makepyfile(
        f"""
        import sys

        import pytest

        @pytest.fixture
        def value():
            return 1

        class TestPlain:
            def test_plain(self, value):
                assert value

        @pytest.mark.parametrize("number", [1, 2])
        def test_no_more_is_imported(number):
            ours = [name for name in sys.modules if name.startswith("pytest_growthbudget.")]
            assert [name for name in {HEAVY} if name in sys.modules] == []
            assert sorted(name.removeprefix("pytest_growthbudget.") for name in ours) == [
                "hookspecs", "plugin", "settings", "workloads", "workloads.fixtures", "workloads.internals",
            ]
        """
    )
    pytester.runpytest_subprocess("-p", "no:hypothesispytest").assert_outcomes(passed=3)


#: Modules that need what is not there everywhere: sys.monitoring, or the extra `page`.
CONDITIONAL = {
    "meters/monitoring.py": sys.version_info >= (3, 12),
    "auditing/by_monitoring.py": sys.version_info >= (3, 12),
    "reporting/page.py": find_spec("jinja2") is not None and find_spec("matplotlib") is not None,
    "reporting/plot.py": find_spec("matplotlib") is not None,
}


def test_every_module_imports_without_a_warning() -> None:
    paths = [path.relative_to(PACKAGE) for path in sorted(PACKAGE.rglob("*.py"))]
    names = [
        ".".join(("pytest_growthbudget", *path.with_suffix("").parts))
        for path in paths
        if path.name not in ("__init__.py", "__main__.py") and CONDITIONAL.get(path.as_posix(), True)
    ]
    assert len(names) > 30
    run("import importlib\nfor name in " + repr(names) + ": importlib.import_module(name)")


def test_public_names_are_loaded_on_first_use() -> None:
    assert run("import pytest_growthbudget as p; print(p.parse_budget('n log n').theta)") == "n log n"
    assert set(pytest_growthbudget.__all__) <= set(dir(pytest_growthbudget))
    with pytest.raises(AttributeError, match="no attribute 'nonsense'"):
        _ = pytest_growthbudget.nonsense
