"""Rays: the one-variable journeys along which a bound in several variables is judged."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class Ray:
    """One variable alone, or all together, the others held.

    `moving`: the variables whose size is the ray's scale; `held`: the size of each other variable; `fixtures`: the
    fixture or argument of each variable.
    """

    moving: tuple[str, ...]
    held: Mapping[str, int]
    fixtures: Mapping[str, str]

    def assign(self, scale: int) -> dict[str, int]:
        """The sizes to give to the fixtures where the moving variables are at `scale`."""
        return {
            fixture: scale if variable in self.moving else self.held[variable]
            for variable, fixture in self.fixtures.items()
        }

    @property
    def variable(self) -> str:
        """The name of the scale: the one variable that moves, or `n` where several do."""
        return self.moving[0] if len(self.moving) == 1 else "n"

    @property
    def name(self) -> str:
        """How reports call it: `V alone, E = 100`, `V = E = n`; "" where there is only one variable."""
        if len(self.fixtures) == 1:
            return ""
        if not self.held:
            return " = ".join((*self.moving, "n"))
        held = ", ".join(f"{variable} = {size}" for variable, size in self.held.items())
        return f"{self.variable} alone, {held}"


def rays(vary: Mapping[str, str], held_size: int) -> tuple[Ray, ...]:
    """The rays of a bound whose variables take their sizes from `vary`: each alone, then all together."""
    variables = tuple(vary)
    together = Ray(moving=variables, held={}, fixtures=vary)
    if len(variables) == 1:
        return (together,)
    alone = tuple(
        Ray(
            moving=(variable,),
            held={other: held_size for other in variables if other != variable},
            fixtures=vary,
        )
        for variable in variables
    )
    return (*alone, together)
