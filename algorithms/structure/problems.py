"""What could not be used, why, and what to do: kept as rows, never as the first exception."""

from typing import NamedTuple

NOWHERE = (float("nan"),) * 3


class Problem(NamedTuple):
    """One thing left out or doubtful.

    `fault_row` and `contact_row` say which input features it concerns (-1: none); `xyz` is its place in metres.
    """

    reason: str
    advice: str
    fault: str = ""
    marker: str = ""
    xyz: tuple = NOWHERE
    fault_row: int = -1
    contact_row: int = -1


class StructureError(Exception):
    """Root of the errors that this package raises."""


class NothingToSolve(StructureError):
    """No fault of the map has a marker on both of its sides."""


class Cancelled(StructureError):
    """The user stopped the run."""


def never_cancelled(fraction):
    """The default of every `report` argument: called with the fraction done, raises `Cancelled` to stop."""
