"""Cutoffs: where each marker ends against each fault, on which wall, at what elevation."""

from typing import NamedTuple

import numpy as np
import shapely

from .attitudes import pole
from .cutoff_points import ON_FAULT, find_ends
from .graph import pairs_within
from .lines import along
from .problems import Problem, never_cancelled
from .sides import CLEAR, hanging_wall_right
from .terrain import gradient
from .traces import fault_table, join_traces, overall_direction


class Contacts(NamedTuple):
    """Digitized contacts as read: arrays of n rows. Azimuths from grid north; nan attitude: none given.

    `att_error` angular error of the attitude in degrees, `pos_error` standard deviation of easting and of northing of
    the drawn line in metres.
    """

    geometry: np.ndarray
    marker: np.ndarray
    strike: np.ndarray
    dip: np.ndarray
    att_error: np.ndarray
    pos_error: np.ndarray


class Cutoffs(NamedTuple):
    """Cutoff points, arrays of c rows.

    `fault` numbers the rows of `Faults`; `hanging` tells the walls apart; `xyz` ``(c, 3)`` metres; `slope` ``(c, 2)``
    rise of the ground eastward and northward; `gap` metres that the contact was prolonged; `contact` its input row.
    """

    fault: np.ndarray
    marker: np.ndarray
    hanging: np.ndarray
    xyz: np.ndarray
    slope: np.ndarray
    strike: np.ndarray
    dip: np.ndarray
    att_error: np.ndarray
    pos_error: np.ndarray
    gap: np.ndarray
    contact: np.ndarray

    def rows(self, keep):
        """The same table with only some rows, given as a mask or as row numbers."""
        return Cutoffs(*(column[keep] for column in self))


class MapRules(NamedTuple):
    """How to read the map: distances in metres, angles in degrees.

    `use_uncut`: a contact drawn unbroken across a fault is a marker of no separation, not a younger line.
    `ground_step`: half the distance over which the slope of the ground is taken.
    """

    search: float
    join_gaps: float = 0.0
    use_uncut: bool = False
    assumed_dip: float = 60.0
    assumed_dip_error: float = 15.0
    ground_step: float = 10.0


def find_cutoffs(fault_lines, contacts, rules, ground=None, report=never_cancelled):
    """Find every cutoff on the map.

    Parameters: `FaultLines`, `Contacts`, `MapRules`; `ground` a function of easting and northing giving the elevation
    in metres (nan: unknown), or None to take the Z of the contact, else of the trace, else 0; `report` called with
    the fraction done.
    Returns `Faults`, `Traces`, `Cutoffs` and a list of `Problem`.
    """
    traces, fault_of_row, mixed = join_traces(fault_lines, ON_FAULT * rules.search, rules.join_gaps)
    faults = fault_table(fault_lines, traces, fault_of_row, mixed, rules.assumed_dip, rules.assumed_dip_error)
    ends, parts, problems = find_ends(contacts.geometry, traces.line, rules.search, report)
    problems += _meeting_no_fault(contacts, ends, problems)
    right, unclear = _walls(traces, faults, rules, ground)
    cutoffs = Cutoffs(
        fault=traces.fault[ends.trace],
        marker=contacts.marker[ends.contact],
        hanging=(ends.offset > 0) == right[ends.trace],
        xyz=_lift(ends, parts, traces, ground),
        slope=_slopes(ends.xy, rules, ground),
        strike=contacts.strike[ends.contact],
        dip=contacts.dip[ends.contact],
        att_error=contacts.att_error[ends.contact],
        pos_error=contacts.pos_error[ends.contact],
        gap=ends.gap,
        contact=ends.contact,
    )
    keep = np.ones(len(ends.trace), bool)
    for leave_out in (_without_ground, _fault_tips, _uncut, _drawn_twice):
        keep &= leave_out(cutoffs, ends, faults, rules, problems, keep)
    keep &= ~unclear[ends.trace]
    problems += _unclear_walls(traces, faults, unclear, ends)
    return faults, traces, cutoffs.rows(keep), problems


def _meeting_no_fault(contacts, ends, problems):
    """A row for every contact that meets no fault and has not been reported yet."""
    met = np.zeros(len(contacts.geometry), bool)
    met[ends.contact] = True
    met[[problem.contact_row for problem in problems if problem.contact_row >= 0]] = True
    rows = np.flatnonzero(~met & ~shapely.is_empty(contacts.geometry) & ~shapely.is_missing(contacts.geometry))
    middle = shapely.get_coordinates(shapely.point_on_surface(contacts.geometry[rows]))
    return [
        Problem(
            "contact meets no fault",
            "nothing to do if it should not; else draw it to the fault or raise the search distance",
            marker=str(contacts.marker[row]),
            xyz=(float(x), float(y), float("nan")),
            contact_row=int(row),
        )
        for row, (x, y) in zip(rows, middle)
    ]


def _level(x, _y):
    return np.zeros_like(x)


def _walls(traces, faults, rules, ground):
    """Whether the hanging wall is on the right of each trace, and where that cannot be told."""
    poles = pole(faults.strike, faults.dip)[traces.fault]
    score = hanging_wall_right(traces.line, poles, max(rules.search, 2 * rules.ground_step), ground or _level)
    return score > 0, np.abs(score) < CLEAR


def _lift(ends, parts, traces, ground):
    """Cutoff points with their elevation, ``(c, 3)``; nan where the elevation model does not reach."""
    x, y = ends.xy[:, 0], ends.xy[:, 1]
    if ground is not None:
        z = ground(x, y)
    else:
        on_contact = _own_z(parts[ends.part], ends.xy)
        on_trace = _own_z(traces.line[ends.trace], ends.xy)
        z = np.nan_to_num(np.where(np.isnan(on_contact), on_trace, on_contact))
    return np.column_stack([ends.xy, z])


def _own_z(lines, points):
    """Z of each single line at the place nearest to a point; nan where it has none."""
    z = np.full(len(lines), np.nan)
    has = np.flatnonzero(shapely.has_z(lines))
    station = shapely.line_locate_point(lines[has], shapely.points(points[has]))
    z[has] = shapely.get_z(shapely.line_interpolate_point(lines[has], station))
    return z


def _slopes(points, rules, ground):
    if ground is None:
        return np.zeros((len(points), 2))
    return gradient(ground, points[:, 0], points[:, 1], rules.ground_step)


def problem_at(cutoffs, faults, row, reason, advice):
    """A problem at one row of a cutoff table."""
    return Problem(
        reason,
        advice,
        str(faults.name[cutoffs.fault[row]]),
        str(cutoffs.marker[row]),
        tuple(float(value) for value in cutoffs.xyz[row]),
        int(faults.row[cutoffs.fault[row]]),
        int(cutoffs.contact[row]),
    )


def _report(cutoffs, faults, rows, reason, advice):
    return [problem_at(cutoffs, faults, row, reason, advice) for row in rows]


def _without_ground(cutoffs, _ends, faults, _rules, problems, _keep):
    known = np.isfinite(cutoffs.xyz[:, 2])
    problems += _report(
        cutoffs,
        faults,
        np.flatnonzero(~known),
        "the elevation raster has no value at this cutoff",
        "use a raster that covers the whole map, or fill its holes",
    )
    return known


def _opposite(cutoffs, ends, keys, reach, keep):
    """Pairs of kept cutoffs on opposite walls of a trace, alike in `keys` and no farther apart than `reach`."""
    a, b = pairs_within(ends.trace, *keys)
    apart = np.hypot(*(ends.xy[a] - ends.xy[b]).T)
    fits = keep[a] & keep[b] & (cutoffs.hanging[a] != cutoffs.hanging[b]) & (apart <= reach)
    return a[fits], b[fits]


def _fault_tips(cutoffs, ends, faults, rules, problems, keep):
    """A fault that ends against the middle of a contact cuts nothing there."""
    a, b = _opposite(cutoffs, ends, [cutoffs.marker], rules.search, keep)
    tip = ends.near_tip[a] & ends.near_tip[b]
    problems += _report(
        cutoffs,
        faults,
        a[tip],
        "the fault ends against the contact: no cutoff",
        "nothing to do, unless the fault goes on beyond the contact: then prolong its trace",
    )
    keep = keep.copy()
    keep[a[tip]] = keep[b[tip]] = False
    return keep


def _uncut(cutoffs, ends, faults, rules, problems, keep):
    """A contact drawn unbroken across the fault is left out unless the user says that it is a marker."""
    if rules.use_uncut:
        return keep
    a, b = _opposite(cutoffs, ends, [ends.part], ON_FAULT * rules.search, keep)
    problems += _report(
        cutoffs,
        faults,
        a,
        "contact drawn unbroken across the fault",
        "if it really shows no separation, set uncut contacts to 'use'; if it is younger, nothing to do",
    )
    keep = keep.copy()
    keep[a] = keep[b] = False
    return keep


def _drawn_twice(cutoffs, ends, _faults, rules, _problems, keep):
    """Of cutoffs of one marker on one wall at the same place keep the one with the smallest gap."""
    a, b = pairs_within(ends.trace, cutoffs.marker, cutoffs.hanging)
    near = keep[a] & keep[b] & (np.hypot(*(ends.xy[a] - ends.xy[b]).T) <= ON_FAULT * rules.search)
    a, b = a[near], b[near]
    keep = keep.copy()
    keep[np.where(ends.gap[a] > ends.gap[b], a, b)] = False
    return keep


def _unclear_walls(traces, faults, unclear, ends):
    """A row for every trace with contacts whose hanging wall cannot be told."""
    direction, straightness = overall_direction(traces, len(faults.name))
    problems = []
    for trace in np.unique(ends.trace[unclear[ends.trace]]):
        fault = traces.fault[trace]
        middle = along(traces.line[[trace]], np.array([[0.5]]) * traces.line[trace].length)[0, 0]
        problems.append(
            Problem(
                f"its hanging wall cannot be told: strike {faults.strike[fault]:.0f}, but the trace as a whole runs "
                f"toward {direction[fault]:.0f} (straightness {straightness[fault]:.2f})",
                "check the fault's azimuth, or give an elevation raster that shows how the trace crosses the hills",
                fault=str(faults.name[fault]),
                xyz=(float(middle[0]), float(middle[1]), float("nan")),
                fault_row=int(faults.row[fault]),
            )
        )
    return problems
