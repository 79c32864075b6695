"""What the laws of fittings by kind share: the place where the fitting stands, and the loss that a law gives back."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any, NamedTuple, TypeAlias

Values: TypeAlias = Mapping[str, Any]
"""Parameters by name, complete and within their ranges: numbers, or one of the choices."""


@dataclass(frozen=True, slots=True)
class Place:
    """The section that carries a fitting: its shape ("round", "rectangular", "oval"), sides and nominal size in m.

    A round one has its bore as width and height.
    """

    shape: str
    width: float
    height: float
    nominal: float

    def sides(self, plane: str) -> tuple[float, float]:
        """The side in the plane of a bend, and the other one; `plane` is "width" or "height"."""
        return (self.height, self.width) if plane == "height" else (self.width, self.height)


class Loss(NamedTuple):
    """K = constant + per_reynolds/Re + corrected x K_Re; `outside` says in words what lay out of the figures' range."""

    constant: float = 0.0
    per_reynolds: float = 0.0
    corrected: float = 0.0
    outside: tuple[str, ...] = ()


Law: TypeAlias = Callable[[Values, Place, Mapping[str, Any]], Loss]
"""Parameters, place and the kind's row of the catalogue to its loss."""

_SLACK = 1e-9


def beyond(what: str, value: float, low: float, high: float, unit: str = "", slack: float = _SLACK) -> tuple[str, ...]:
    """The sentence that `value` lay outside low to high, or nothing; `slack` is a share."""
    if low * (1.0 - slack) - _SLACK <= value <= high * (1.0 + slack) + _SLACK:
        return ()
    return (f"{what} {value:.4g}{unit} lay outside {low:g} to {high:g}{unit}",)


def chosen(of: list[list[Any]], value: Any) -> Any:
    """The figure beside `value` in a list of pairs [choice, figure]."""
    return next(figure for choice, figure in of if choice == value)
