"""Equal-sized fault problems as arrays: every slip equation in the frame of its fault.

In the fault frame (along strike s, down dip d, pole n) a marker with pole m and a cutoff point p says of any point
X = x s + y d of the fault plane on its cutoff line: ``m.(X - p) = 0``, one linear equation in x and y. The piercing
point of a wall is where the cutoff lines of that wall meet; the slip is the hanging wall's minus the footwall's.
"""

from typing import NamedTuple

import numpy as np

from .attitudes import along_strike, angle_between_planes, down_dip, dot, frame, mean_pole, pole, strike_dip

SAME_ATTITUDE = 0.01  # degrees: attitudes nearer than this in both blocks are one measurement written twice


class Wall(NamedTuple):
    """The cutoffs of one wall in fault-frame components, arrays (s, k, 3) and (s, k).

    `pole` of the marker; `turn` ``(s, k, 2, 3)`` the two directions in which its error moves it (a change of strike,
    a change of dip); `pole_sd` radians; `point` of the cutoff relative to the fault's centre; `shift_sd` metres,
    standard deviation of the cutoff's position across the marker; `given` whether the marker has an attitude.
    """

    pole: np.ndarray
    turn: np.ndarray
    pole_sd: np.ndarray
    point: np.ndarray
    shift_sd: np.ndarray
    given: np.ndarray


class Batch(NamedTuple):
    """Solutions that have the same number k of markers: s of them.

    `axes` ``(s, 3, 3)`` the fault frame, `strike`, `dip` degrees, `centre` ``(s, 3)``; `pole_sd` radians and
    `dip_spread` degrees of the fault; `rake` 0-180 down from strike of its slickenlines (nan: none), `rake_sd` degrees.
    `shared` whether the walls share their attitudes: then both walls hold the pooled poles. `apart` ``(s, k)`` is the
    angle between a marker's attitudes in the two blocks, in standard deviations of their difference.
    """

    axes: np.ndarray
    strike: np.ndarray
    dip: np.ndarray
    centre: np.ndarray
    pole_sd: np.ndarray
    dip_spread: np.ndarray
    rake: np.ndarray
    rake_sd: np.ndarray
    hanging: Wall
    foot: Wall
    apart: np.ndarray
    shared: bool

    def part(self, keep):
        """The same batch with only some of its solutions."""
        cut = {name: getattr(self, name)[keep] for name in self._fields if name not in ("hanging", "foot", "shared")}
        walls = [Wall(*(column[keep] for column in wall)) for wall in (self.hanging, self.foot)]
        return Batch(**cut, hanging=walls[0], foot=walls[1], shared=self.shared)

    def given(self):
        """Whether both walls of a marker have an attitude, ``(s, k)``."""
        return self.hanging.given & self.foot.given


class Errors(NamedTuple):
    """Errors that hold for all faults, degrees: of their poles, and of the rake of their slickenlines."""

    fault: float
    rake: float


def gather(faults, cutoffs, fault, hanging, foot, errors, shared):
    """Put solutions of equally many markers into one `Batch`.

    Parameters: fault number ``(s,)`` and rows of the cutoff table ``(s, k)`` for either wall.
    """
    strike, dip = faults.strike[fault], faults.dip[fault]
    axes = frame(strike, dip)
    centre = (cutoffs.xyz[hanging].mean(axis=1) + cutoffs.xyz[foot].mean(axis=1)) / 2
    poles, sds, apart = _marker_poles(cutoffs, hanging, foot, shared)
    walls = [
        _wall(cutoffs, rows, axes, centre, poles[number], sds[number]) for number, rows in enumerate((hanging, foot))
    ]
    full = np.full(len(fault), 1.0)
    return Batch(
        axes=axes,
        strike=strike,
        dip=dip,
        centre=centre,
        pole_sd=np.radians(errors.fault) * full,
        dip_spread=faults.dip_spread[fault],
        rake=faults.rake[fault],
        rake_sd=errors.rake * full,
        hanging=walls[0],
        foot=walls[1],
        apart=apart,
        shared=shared,
    )


def _own_poles(cutoffs, rows):
    """Poles ``(s, k, 3)`` of cutoffs; a horizontal marker needs no strike; nan where there is no attitude."""
    dip = cutoffs.dip[rows]
    strike = np.where(dip == 0, np.nan_to_num(cutoffs.strike[rows]), cutoffs.strike[rows])
    return pole(strike, dip)


def _marker_poles(cutoffs, hanging, foot, shared):
    """Poles and their standard deviations (radians) for the two walls, and how far apart the blocks measure.

    A wall without an attitude borrows the other's. Shared attitudes are pooled: weights from their errors; the same
    attitude on both sides is one measurement, different ones are two.
    """
    own = np.stack([_own_poles(cutoffs, hanging), _own_poles(cutoffs, foot)], axis=2)
    sd = np.radians(np.stack([cutoffs.att_error[hanging], cutoffs.att_error[foot]], axis=2))
    known = ~np.isnan(own[..., 0])
    own = np.where(known[..., None], own, own[:, :, ::-1])
    sd = np.where(known, sd, sd[:, :, ::-1])
    angle = angle_between_planes(own[:, :, 0], own[:, :, 1])
    apart = np.radians(angle) / np.maximum(np.hypot(sd[..., 0], sd[..., 1]), 1e-9)
    if not shared:
        return (own[:, :, 0], own[:, :, 1]), (sd[..., 0], sd[..., 1]), apart
    twice = angle > SAME_ATTITUDE
    weight = 1.0 / np.maximum(sd, 1e-9) ** 2
    any_known = known.any(axis=2)
    mean = mean_pole(np.nan_to_num(own), np.where(any_known[..., None], weight, 1.0))
    pooled = np.where(any_known[..., None], np.where(twice[..., None], mean, own[:, :, 0]), np.nan)
    pooled_sd = np.where(twice, weight.sum(axis=2) ** -0.5, sd.min(axis=2))
    return (pooled, pooled), (pooled_sd, pooled_sd), apart


def _wall(cutoffs, rows, axes, centre, poles, pole_sd):
    strike, dip = strike_dip(poles)
    turn = np.stack([along_strike(strike), down_dip(strike, dip)], axis=2)
    ground = poles[..., :2] + poles[..., 2:] * cutoffs.slope[rows]
    given = ~np.isnan(poles[..., 0])
    return Wall(
        pole=np.einsum("sij,skj->ski", axes, poles),
        turn=np.einsum("sij,sktj->skti", axes, turn),
        pole_sd=pole_sd,
        point=np.einsum("sij,skj->ski", axes, cutoffs.xyz[rows] - centre[:, None]),
        shift_sd=cutoffs.pos_error[rows] * np.sqrt(dot(ground, ground)),
        given=given,
    )
