"""Where contacts end against fault traces, on maps as they are drawn.

The rule: take away from a contact everything that lies on a fault; every end that is left near a fault trace is a
candidate; where the contact itself does not reach the trace, prolong its last stretch (the gap is reported). The block
comes from the side on which the contact lies, not from its end.
"""

from typing import NamedTuple

import numpy as np
import shapely

from .lines import along, end_points, explode, nearest_point, offset_right, xy
from .problems import Problem, never_cancelled

ON_FAULT = 0.1  # of the search distance: nearer than this a contact runs on the fault
LOOK_BACK = 10.0  # search distances of a contact that decide on which side of the fault it lies
SAMPLES_BACK = 8
REACH = 4.0  # search distances that a last stretch may be prolonged, measured along it
RUNS_BESIDE = (
    "contact runs beside the fault for long without touching it",
    "snap it to the fault where the two coincide, or lower the search distance",
)
AT_JUNCTION = (
    "contact ends where two faults meet",
    "draw it to the fault that cuts it, or give the two faults one name if they are one",
)
NOT_HEADING = (
    "contact ends beside the fault without heading for it",
    "draw it to the fault, or lower the search distance if it does not belong to it",
)
CHUNK = 1000  # contacts between two looks at the cancel button


class Ends(NamedTuple):
    """Ends of contacts on fault traces, arrays of c rows.

    `contact` input row, `part` number of the single line (a contact crossing a fault gives two ends of one part),
    `trace`, `xy` ``(c, 2)`` the point on the trace, `gap` metres that the contact stops short of it, `offset`
    signed distance of the contact from the trace, positive to the right, `near_tip` whether the trace ends here.
    """

    contact: np.ndarray
    part: np.ndarray
    trace: np.ndarray
    xy: np.ndarray
    gap: np.ndarray
    offset: np.ndarray
    near_tip: np.ndarray


def find_ends(contacts, traces, search, report=never_cancelled):
    """Ends of contacts on fault traces within the search distance.

    Parameters: `contacts` ``(n,)`` lines or multi-lines, `traces` ``(t,)`` lines, both in metres; `search` how far
    short of a fault a contact may stop, in metres; `report` called with the fraction done.
    Returns `Ends`, the single lines that its `part` numbers, and a list of `Problem`.
    """
    parts, rows = explode(contacts)
    flat_parts, flat = shapely.force_2d(parts), shapely.force_2d(traces)
    strips = shapely.buffer(flat, ON_FAULT * search, quad_segs=2)
    tree = shapely.STRtree(flat)
    found, problems = [], []
    for start in range(0, len(parts), CHUNK):
        report(start / len(parts))
        ends, missed = _ends_of_chunk(flat_parts[start : start + CHUNK], flat, strips, tree, search)
        found.append(ends._replace(contact=rows[ends.part + start], part=ends.part + start))
        problems += [problem._replace(contact_row=int(rows[problem.contact_row + start])) for problem in missed]
    if not found:
        return _none(), parts, problems
    return Ends(*(np.concatenate(column) for column in zip(*found))), parts, problems


def _none():
    whole, number = np.zeros(0, int), np.zeros(0)
    return Ends(whole, whole, whole, np.zeros((0, 2)), number, number, np.zeros(0, bool))


def _ends_of_chunk(parts, traces, strips, tree, search):
    part, trace = tree.query(parts, predicate="dwithin", distance=search)
    if not len(part):
        return _none(), []
    pieces, piece_part = _pieces_off_faults(parts, part, trace, strips)
    end, pair = _ends_near(pieces, piece_part, part, trace, traces, search)
    piece, side = end // 2, end % 2
    stretch, leaves = _look_back(pieces[piece], side, traces[trace[pair]], search)
    beside = np.unique(end[~leaves & (shapely.length(pieces[piece]) > LOOK_BACK * search)])
    problems = [_problem(pieces, piece_part, number, *RUNS_BESIDE) for number in beside]
    end, pair, stretch = end[leaves], pair[leaves], stretch[leaves]
    point, gap = _on_trace(pieces, end, parts[part[pair]], traces[trace[pair]], search)
    keep, astray = _choose_trace(end, gap, pieces, piece_part, search)
    keep &= ~np.isnan(gap)
    end, pair, point, gap = end[keep], pair[keep], point[keep], gap[keep]
    line = traces[trace[pair]]
    station = shapely.line_locate_point(line, shapely.points(point))
    ends = Ends(
        contact=part[pair],
        part=part[pair],
        trace=trace[pair],
        xy=point,
        gap=gap,
        offset=stretch[keep],
        near_tip=np.minimum(station, shapely.length(line) - station) <= search,
    )
    return ends, problems + astray


def _pieces_off_faults(parts, part, trace, strips):
    """What is left of each contact beside the faults, as single lines, and the part each comes from.

    A contact is trimmed by all the traces near it, one after the other: round k takes every contact's k-th trace.
    """
    left = parts.copy()
    rank = np.arange(len(part)) - np.searchsorted(part, part)
    for k in range(rank.max() + 1):
        now = rank == k
        left[part[now]] = shapely.difference(left[part[now]], strips[trace[now]])
    touched = np.unique(part)
    pieces, index = explode(left[touched])
    return pieces, touched[index]


def _ends_near(pieces, piece_part, part, trace, traces, search):
    """Pairs (end number, pair number) of piece ends within the search distance of one of their part's traces.

    End 2 i is the start of piece i, 2 i + 1 its end.
    """
    first = np.searchsorted(part, piece_part)
    count = np.searchsorted(part, piece_part, side="right") - first
    piece = np.repeat(np.arange(len(pieces)), count)
    pair = np.repeat(first, count) + np.arange(count.sum()) - np.repeat(np.cumsum(count) - count, count)
    end = (2 * piece[:, None] + [0, 1]).ravel()
    pair = np.repeat(pair, 2)
    gap = shapely.distance(end_points(pieces).ravel()[end], traces[trace[pair]])
    near = gap <= search * (1 + 1e-9)
    return end[near], pair[near]


def _look_back(pieces, side, traces, search):
    """On which side of the trace each piece leaves, as its mean offset (positive right), and whether it leaves.

    A piece that stays within the search distance of the trace is an overshoot or a stretch drawn beside the fault.
    """
    length = shapely.length(pieces)
    back = np.minimum(length, LOOK_BACK * search)[:, None] * (np.arange(SAMPLES_BACK) + 1) / SAMPLES_BACK
    points = along(pieces, np.where(side[:, None] == 0, back, length[:, None] - back))
    offsets = offset_right(traces, points, ON_FAULT * search)
    return offsets.mean(axis=1), np.abs(offsets).max(axis=1) > search


def _on_trace(pieces, end, parts, traces, search):
    """The point on the trace that a piece's end belongs to, and the gap that the contact leaves; nan: none."""
    tips = end_points(pieces).ravel()[end]
    meeting = shapely.intersection(parts, traces)
    point = nearest_point(meeting, tips)
    reached = shapely.distance(meeting, tips) <= search
    missing = np.flatnonzero(~reached)
    point[missing] = _prolonged(pieces[end[missing] // 2], end[missing] % 2, traces[missing], search)
    gap = np.where(reached, 0.0, shapely.distance(parts, shapely.points(np.nan_to_num(point))))
    return point, np.where(np.isnan(point[:, 0]), np.nan, gap)


def _prolonged(pieces, side, traces, search):
    """Where the last stretch of each piece, one search distance long, meets the trace when prolonged."""
    length = shapely.length(pieces)
    back = np.minimum(search, length)
    here = np.where(side == 0, 0.0, length)
    there = np.where(side == 0, back, length - back)
    ends = along(pieces, np.stack([here, there], axis=-1))
    way = ends[:, 0] - ends[:, 1]
    far = ends[:, 0] + way / np.hypot(way[:, 0], way[:, 1])[:, None] * REACH * search
    rays = shapely.linestrings(np.stack([ends[:, 0], far], axis=1))
    return nearest_point(shapely.intersection(rays, traces), shapely.points(ends[:, 0]))


def _choose_trace(end, gap, pieces, piece_part, search):
    """Give every end to the trace that it meets first; report the ends that meet none, or two at once."""
    cost = np.where(np.isnan(gap), np.inf, gap)
    order = np.lexsort([cost, end])
    first = np.r_[True, end[order][1:] != end[order][:-1]]
    keep = np.zeros(len(end), bool)
    keep[order[first]] = True
    second = np.flatnonzero(~first)
    tied = order[second][cost[order[second]] - cost[order[second - 1]] <= ON_FAULT * search]
    tied = tied[np.isfinite(cost[tied])]
    tied_ends = np.unique(end[tied])
    problems = [_problem(pieces, piece_part, number, *AT_JUNCTION) for number in tied_ends]
    astray = np.setdiff1d(end, end[np.isfinite(cost)])
    problems += [_problem(pieces, piece_part, number, *NOT_HEADING) for number in astray]
    return keep & ~np.isin(end, tied_ends), problems


def _problem(pieces, piece_part, end, reason, advice):
    place = xy(shapely.get_point(pieces[end // 2], 0 if end % 2 == 0 else -1))
    return Problem(reason, advice, xyz=(float(place[0]), float(place[1]), float("nan")), contact_row=int(piece_part[end // 2]))
