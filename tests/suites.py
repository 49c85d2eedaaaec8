"""What inner runs of pytest have in common."""

#: A conftest.py whose workload is a list of random numbers.
NUMBERS = """
    import pytest

    @pytest.fixture
    def numbers(problem_size, workload_rng):
        return [workload_rng.random() for _ in range(problem_size)]
"""
