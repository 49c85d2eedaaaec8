"""A share of tries, with what may be said of it."""

from __future__ import annotations

from dataclasses import dataclass

from scipy.special import betaincinv


@dataclass(frozen=True, slots=True, kw_only=True)
class Rate:
    """`hits` of `tries`; prints as a share with the 95 % upper limit of Clopper and Pearson (1934) [from memory]."""

    hits: int
    tries: int

    @property
    def share(self) -> float:
        return self.hits / self.tries if self.tries else float("nan")

    @property
    def at_most(self) -> float:
        """The one-sided 95 % upper limit; with no hits it is the rule of three, 3 / tries."""
        return float(betaincinv(self.hits + 1, self.tries - self.hits, 0.95)) if self.hits < self.tries else 1.0

    def __str__(self) -> str:
        return f"{100 * self.share:.1f} % ({self.hits} of {self.tries})" if self.tries else "none"
