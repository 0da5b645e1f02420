"""From digitized fault lines to fault traces: which pieces are one trace, which traces are one fault.

A digitized fault is seldom one line: maps split it at every contact, at every change of its attributes and where
cover hides it. Pieces whose ends touch are one trace unless they carry different names; at a branch only the pair
that runs straight on is joined, the others stay apart. All traces of one name are one fault.
"""

from typing import NamedTuple

import numpy as np
import shapely

from .attitudes import angle_between_planes, along_strike, mean_pole, pole, strike_dip
from .graph import chains
from .lines import azimuth_of, end_points, explode, xy

MAX_DEFLECTION = 60.0  # degrees that a trace may turn where two pieces touch
STRAIGHT_ON = 20.0  # degrees, at a branch and across a covered gap
MAX_ATTITUDE_STEP = 45.0  # degrees between the planes of two pieces; more is two faults that meet


class FaultLines(NamedTuple):
    """Digitized faults as read: arrays of n rows. Azimuths from grid north; nan for what a row does not say.

    `name` is text, the feature id where `named` is False. `rake` is that of slickenlines, 0-180 down from strike.
    """

    geometry: np.ndarray
    name: np.ndarray
    named: np.ndarray
    strike: np.ndarray
    dip: np.ndarray
    rake: np.ndarray


class Traces(NamedTuple):
    """Joined traces: LineStrings ``(t,)``, the fault of each, and how many digitized pieces it was made of."""

    line: np.ndarray
    fault: np.ndarray
    pieces: np.ndarray


class Faults(NamedTuple):
    """Faults, arrays of f rows: name, first input row, and attitude (degrees, grid north).

    `dip_spread` is the half width of the uniform spread of an assumed dip, 0 where the dip was given. `reversed_pieces`
    marks a fault without an azimuth whose pieces were digitized in opposite directions.
    """

    name: np.ndarray
    row: np.ndarray
    strike: np.ndarray
    dip: np.ndarray
    dip_spread: np.ndarray
    rake: np.ndarray
    reversed_pieces: np.ndarray


def _outward(parts):
    """Azimuth in which each piece leaves at its ends, ``(n, 2)``."""
    last = xy(shapely.get_point(parts, -1)) - xy(shapely.get_point(parts, -2))
    first = xy(shapely.get_point(parts, 0)) - xy(shapely.get_point(parts, 1))
    return np.stack([azimuth_of(first), azimuth_of(last)], axis=-1)


def _turn(azimuth_in, azimuth_out):
    return np.abs((azimuth_in - azimuth_out + 180.0) % 360.0 - 180.0)


def _may_join(lines, rows, a, b):
    """Whether pieces a and b may be one fault by their names and attitudes."""
    named = lines.named[rows]
    name = lines.name[rows]
    same = ~named[a] | ~named[b] | (name[a] == name[b])
    poles = pole(lines.strike[rows], lines.dip[rows])
    step = angle_between_planes(poles[a], poles[b])
    return same & ~(step > MAX_ATTITUDE_STEP)


def _mutual(link, a, b, cost):
    """Link the pairs of ends (a, b) in which each is the other's cheapest."""
    best = np.full(link.shape, np.inf)
    np.minimum.at(best, a, cost)
    np.minimum.at(best, b, cost)
    chosen = (cost == best[a]) & (cost == best[b]) & (link[a] < 0) & (link[b] < 0)
    for i, j in zip(a[chosen], b[chosen]):
        if link[i] < 0 and link[j] < 0:
            link[i], link[j] = j, i


def _end_pairs(ends, distance):
    """Pairs of end numbers no farther apart than `distance`, each once, never an end with itself."""
    tree = shapely.STRtree(ends)
    a, b = tree.query(ends, predicate="dwithin", distance=distance)
    return a[a < b], b[a < b]


def _links(parts, lines, rows, touch, join_gaps):
    """For every end of every piece the end that it is joined to, or -1."""
    ends = end_points(parts).ravel()
    leaving = _outward(parts).ravel()
    link = np.full(ends.size, -1)
    a, b = _end_pairs(ends, touch)
    crowd = np.bincount(np.concatenate([a, b]), minlength=ends.size)
    turn = _turn(leaving[a], leaving[b] + 180.0)
    allowed = np.where((crowd[a] > 1) | (crowd[b] > 1), STRAIGHT_ON, MAX_DEFLECTION)
    same_named = (lines.named[rows[a // 2]]) & (lines.name[rows[a // 2]] == lines.name[rows[b // 2]])
    fits = _may_join(lines, rows, a // 2, b // 2) & (a // 2 != b // 2) & ((turn <= allowed) | same_named)
    _mutual(link, a[fits], b[fits], turn[fits])
    if join_gaps > 0:
        _link_across_gaps(link, ends, leaving, lines, rows, join_gaps)
    return link


def _link_across_gaps(link, ends, leaving, lines, rows, join_gaps):
    """Join loose ends of one fault that face each other in line across a covered gap."""
    loose = np.flatnonzero(link < 0)
    i, j = _end_pairs(ends[loose], join_gaps)
    a, b = loose[i], loose[j]
    gap = xy(ends[b]) - xy(ends[a])
    bearing = azimuth_of(gap)
    in_line = (_turn(leaving[a], bearing) <= STRAIGHT_ON) & (_turn(leaving[b], bearing + 180.0) <= STRAIGHT_ON)
    alike = lines.named[rows[a // 2]] == lines.named[rows[b // 2]]
    fits = in_line & alike & (a // 2 != b // 2) & _may_join(lines, rows, a // 2, b // 2)
    _mutual(link, a[fits], b[fits], np.hypot(gap[fits, 0], gap[fits, 1]))


def _chain_line(parts, chain):
    """One line of the pieces of a chain, in the direction that most of its length was digitized in."""
    if len(chain) == 1:
        return parts[chain[0][0]], False
    length = [shapely.length(parts[piece]) for piece, _ in chain]
    backwards = sum(part for part, (_, turned) in zip(length, chain) if turned)
    coordinates = [
        shapely.get_coordinates(parts[piece], include_z=True)[:: -1 if turned else 1] for piece, turned in chain
    ]
    line = shapely.remove_repeated_points(shapely.linestrings(np.concatenate(coordinates)))
    if backwards > sum(length) / 2:
        line = shapely.reverse(line)
    return line, 0 < backwards < sum(length)


def join_traces(lines, touch, join_gaps=0.0):
    """Put the pieces of digitized faults together.

    Parameters: `lines` a `FaultLines`; `touch` metres within which ends are the same point; `join_gaps` longest gap
    in metres to bridge between pieces of one fault that lie in line.
    Returns `Traces` whose `fault` numbers faults in order of their first row, the row of every piece's fault
    ``(n,)`` (-1 for a row without a usable line), and a mask of traces with pieces digitized in opposite directions.
    """
    parts, rows = explode(lines.geometry)
    found = chains(len(parts), _links(parts, lines, rows, touch, join_gaps).tolist())
    built = [_chain_line(parts, chain) for chain in found]
    line = np.array([geometry for geometry, _ in built], object)
    chain_of = np.empty(len(parts), int)
    for number, chain in enumerate(found):
        chain_of[[piece for piece, _ in chain]] = number
    key = _fault_of_chain(lines, rows, chain_of, len(found))
    first, fault = np.unique(key, return_inverse=True)
    fault_of_row = np.full(len(lines.name), -1)
    fault_of_row[rows] = fault[chain_of]
    pieces = np.array([len(chain) for chain in found], int)
    return Traces(line, fault, pieces), fault_of_row, np.array([mixed for _, mixed in built], bool)


def _fault_of_chain(lines, rows, chain_of, count):
    """A number for each chain's fault: the smallest row among its pieces and, by name, among its namesakes'."""
    smallest = np.full(count, len(lines.name))
    np.minimum.at(smallest, chain_of, rows)
    names, number = np.unique(lines.name[rows[lines.named[rows]]], return_inverse=True)
    by_name = np.full(len(names), len(lines.name))
    np.minimum.at(by_name, number, rows[lines.named[rows]])
    via_name = by_name[number]
    np.minimum.at(smallest, chain_of[lines.named[rows]], via_name)
    return smallest


def overall_direction(traces, count):
    """Azimuth ``(count,)`` of each fault's traces from their first to their last point, and its straightness 0-1.

    The straightness is the chord's share of the length: 0 for a closed trace, whose direction means nothing.
    """
    chord = xy(shapely.get_point(traces.line, -1)) - xy(shapely.get_point(traces.line, 0))
    total = np.zeros((count, 2))
    np.add.at(total, traces.fault, chord)
    length = np.bincount(traces.fault, shapely.length(traces.line), minlength=count)
    return azimuth_of(total), np.hypot(total[:, 0], total[:, 1]) / length


def _weighted_mean(values, weights, fault, count):
    """Length-weighted mean of the given values of each fault's pieces; nan where no piece has one."""
    given = ~np.isnan(values)
    total = np.bincount(fault[given], weights[given], minlength=count)
    mean = np.bincount(fault[given], (values * weights)[given], minlength=count)
    return np.divide(mean, total, out=np.full(count, np.nan), where=total > 0)


def _mean_attitude(lines, weights, fault, count):
    """Strike and dip of the mean pole of each fault's pieces that have both; nan elsewhere."""
    both = ~np.isnan(lines.strike + lines.dip)
    tensor_poles = pole(lines.strike[both], lines.dip[both])
    strike, dip = np.full(count, np.nan), np.full(count, np.nan)
    order = np.argsort(fault[both], kind="stable")
    owners, starts, sizes = np.unique(fault[both][order], return_index=True, return_counts=True)
    width = sizes.max(initial=0)
    column = np.arange(width)
    index = order[np.minimum(starts[:, None] + column, max(len(order) - 1, 0))] if len(order) else order[:, None]
    weight = np.where(column < sizes[:, None], weights[both][index], 0.0)
    if len(owners):
        strike[owners], dip[owners] = strike_dip(mean_pole(tensor_poles[index], weight))
    return strike, dip


def fault_table(lines, traces, fault_of_row, mixed, assumed_dip, assumed_dip_error):
    """Attitude of every fault, from what its pieces say, else from its trace and the assumed dip.

    Without an azimuth the strike is the traces' overall direction as digitized, dip to the right. Without a dip it
    is `assumed_dip`, uniform within +-`assumed_dip_error` degrees. Lengths of the pieces are the weights.
    """
    count = int(traces.fault.max()) + 1 if len(traces.fault) else 0
    used = fault_of_row >= 0
    rows = np.flatnonzero(used)
    pieces = FaultLines(*(np.asarray(column)[used] for column in lines))
    fault, weights = fault_of_row[used], shapely.length(pieces.geometry)
    first = np.full(count, len(fault_of_row))
    np.minimum.at(first, fault, rows)
    strike, dip = _mean_attitude(pieces, weights, fault, count)
    lone = along_strike(pieces.strike)
    mean_strike = azimuth_of(
        np.stack([_weighted_mean(lone[:, axis], weights, fault, count) for axis in (0, 1)], axis=-1)
    )
    direction, _ = overall_direction(traces, count)
    strike = np.where(np.isnan(strike), np.where(np.isnan(mean_strike), direction, mean_strike), strike)
    dip = np.where(np.isnan(dip), _weighted_mean(pieces.dip, weights, fault, count), dip)
    spread = np.where(np.isnan(dip), assumed_dip_error, 0.0)
    no_azimuth = np.isnan(mean_strike)
    mixed_fault = np.zeros(count, bool)
    np.logical_or.at(mixed_fault, traces.fault, mixed)
    return Faults(
        name=lines.name[_naming_row(lines, fault_of_row, first, count)],
        row=first,
        strike=strike,
        dip=np.where(np.isnan(dip), assumed_dip, dip),
        dip_spread=spread,
        rake=_weighted_mean(pieces.rake, weights, fault, count),
        reversed_pieces=mixed_fault & no_azimuth,
    )


def _naming_row(lines, fault_of_row, first, count):
    """The row whose name a fault takes: its first named piece, else its first piece."""
    row = np.full(count, len(fault_of_row))
    candidates = np.flatnonzero((fault_of_row >= 0) & lines.named)
    np.minimum.at(row, fault_of_row[candidates], candidates)
    return np.where(row < len(fault_of_row), row, first)
