"""What one marker alone says of a fault: its separations and the slips that they allow."""

from typing import NamedTuple

import numpy as np

from .attitudes import dot
from .batch import Batch
from .estimate import usable

ALONG_STRIKE = 1.0  # degrees; a cutoff line flatter than this in the fault plane has no strike separation


class Separations(NamedTuple):
    """Separations of markers, arrays of k rows, metres; nan where there is none.

    `strike` along the fault's strike, positive sinistral; `dip` down its dip, positive normal; `across` perpendicular
    to the marker; `least` the smallest slip in the fault plane that makes them, at right angles to the cutoff line,
    never less than `across`; `cutoff_rake` 0-180 down from strike, of the cutoff line and so of the line of possible
    slips, which runs parallel to it through the tip of the least slip.
    """

    strike: np.ndarray
    dip: np.ndarray
    across: np.ndarray
    least: np.ndarray
    cutoff_rake: np.ndarray


def separations(batch: Batch):
    """Separations ``(s, k)`` of every marker of a batch with shared attitudes.

    A marker without an attitude gets its strike separation from the map alone: the distance between its cutoffs along
    the strike, which is exact on level ground.
    """
    apart = batch.hanging.point - batch.foot.point
    poles = batch.hanging.pole
    moved = dot(poles, apart)
    along, down = poles[..., 0], poles[..., 1]
    cut = usable(batch.hanging)
    effect = np.hypot(along, down)
    level = np.abs(along) < effect * np.sin(np.radians(ALONG_STRIKE))
    steep = np.abs(down) < effect * np.sin(np.radians(ALONG_STRIKE))
    with np.errstate(divide="ignore", invalid="ignore"):
        strike = np.where(cut & ~level, moved / along, np.nan)
        dip = np.where(cut & ~steep, moved / down, np.nan)
        least = np.where(cut, np.abs(moved) / effect, np.nan)
    return Separations(
        strike=np.where(batch.hanging.given, strike, apart[..., 0]),
        dip=dip,
        across=np.abs(moved),
        least=least,
        cutoff_rake=np.where(cut, np.degrees(np.arctan2(-along, down)) % 180.0, np.nan),
    )
