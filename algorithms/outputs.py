"""From results to output layers as arrays: columns by field name, and geometries in metres of the frame."""

from typing import NamedTuple

import numpy as np
import shapely

from . import tables
from .structure.attitudes import azimuth
from .structure.cutoff_lines import cutoff_lines
from .structure.results import separation_rows, slip_rows
from .structure.uncertainty import LEVEL

BLOCKS = np.array(["footwall", "hanging wall"], object)


class Layer(NamedTuple):
    """One output layer: its table, columns by field name, and shapely geometries in metres (None: no geometry)."""

    table: tables.Table
    columns: dict
    geometry: np.ndarray


def _lines(start, end):
    """LineStrings ``(n,)`` between points ``(n, 3)``; None where a point is unknown or both are the same."""
    lines = np.full(len(start), None, object)
    drawn = np.isfinite(start).all(axis=1) & np.isfinite(end).all(axis=1) & (start != end).any(axis=1)
    if drawn.any():
        lines[drawn] = shapely.linestrings(np.stack([start[drawn], end[drawn]], axis=1))
    return lines


def _intervals(slips):
    """The columns of medians and bounds of every quantity."""
    return {
        f"{quantity}_{suffix}": values
        for suffix, table in (("med", slips.median), ("lo", slips.low), ("hi", slips.high))
        for quantity, values in table.items()
    }


def slip_layer(slips, faults, true_minus_grid, grid_turn):
    """SLIP_VECTORS. `grid_turn` ``(f,)`` degrees from the frame's grid north to that of the results' CRS."""
    strike = (faults.strike + true_minus_grid)[slips.fault] % 360.0
    length = np.hypot(slips.slip[:, 0], slips.slip[:, 1])
    way = np.radians(azimuth(slips.slip) + grid_turn[slips.fault])
    columns = {
        "fault": faults.name[slips.fault],
        "markers": slips.markers,
        "n_markers": slips.n_markers,
        "method": slips.method,
        "net_slip": slips.net,
        "rake": slips.rake,
        "rake_note": slips.rake_note,
        "trend": slips.trend,
        "plunge": slips.plunge,
        "slip_az": slips.azimuth,
        "strikeslip": slips.sinistral,
        "dip_slip": slips.normal,
        "heave": slips.heave,
        "throw": slips.throw,
        "d_east": length * np.sin(way),
        "d_north": length * np.cos(way),
        "d_up": slips.slip[:, 2],
        "sense": slips.sense,
        "sense_prob": slips.sense_prob,
        "p_normal": slips.normal_prob,
        "p_sinist": slips.sinistral_prob,
        "cross_ang": slips.crossing,
        "misfit": slips.misfit,
        "rotation": slips.rotation,
        "least_slip": slips.least,
        "var_shares": slips.shares,
        "flt_strike": strike,
        "flt_dip": faults.dip[slips.fault],
        "caution": slips.caution,
        **_intervals(slips),
    }
    return Layer(tables.SLIP_VECTORS, columns, _lines(slips.foot, slips.hanging))


def piercing_layer(slips, faults):
    """PIERCING_POINTS: two rows for every net slip."""
    solved = np.flatnonzero(np.isfinite(slips.net))
    row, wall = np.repeat(solved, 2), np.tile([0, 1], len(solved))
    point = np.where(wall[:, None] == 0, slips.foot[row], slips.hanging[row])
    columns = {
        "fault": faults.name[slips.fault[row]],
        "block": BLOCKS[wall],
        "markers": slips.markers[row],
        "elev": point[:, 2],
        "depth": slips.depth[row, wall],
        "cross_ang": slips.crossing[row],
        "sd_strike": slips.sd[row, 0],
        "sd_dip": slips.sd[row, 1],
    }
    return Layer(tables.PIERCING_POINTS, columns, shapely.points(point))


def cutoff_layer(faults, cutoffs, state, length, true_minus_grid, solved=()):
    """CUTOFF_LINES: every cutoff found, matched or not."""
    lines = cutoff_lines(faults, cutoffs, length, solved)
    turn = true_minus_grid[cutoffs.fault]
    columns = {
        "fault": faults.name[cutoffs.fault],
        "block": BLOCKS[cutoffs.hanging.astype(int)],
        "marker": cutoffs.marker,
        "state": state,
        "strike": (cutoffs.strike + turn) % 360.0,
        "dip": cutoffs.dip,
        "att_error": cutoffs.att_error,
        "flt_strike": (faults.strike[cutoffs.fault] + turn) % 360.0,
        "flt_dip": faults.dip[cutoffs.fault],
        "flt_dip_un": faults.dip_spread[cutoffs.fault],
        "flt_rake": faults.rake[cutoffs.fault],
        "trend": (lines.trend + turn) % 360.0,
        "plunge": lines.plunge,
        "rake": lines.rake,
        "gap": cutoffs.gap,
        "off_plane": lines.off_plane,
        "pos_error": cutoffs.pos_error,
        "slope_e": cutoffs.slope[:, 0],
        "slope_n": cutoffs.slope[:, 1],
    }
    return Layer(tables.CUTOFF_LINES, columns, _lines(cutoffs.xyz, lines.end))


def separation_layer(solved, faults, cutoffs):
    """SEPARATIONS: one row for every matched marker; none drawn where both cutoffs are at one point."""
    rows = separation_rows(solved, cutoffs)
    columns = {
        "fault": faults.name[cutoffs.fault[rows.hanging]],
        "marker": cutoffs.marker[rows.hanging],
        "strike_sep": rows.strike,
        "dip_sep": rows.dip,
        "perp_sep": rows.across,
        "least_slip": rows.least,
        "rake": rows.cutoff_rake,
        "app_sense": rows.sense,
        "residual": rows.residual,
    }
    return Layer(tables.SEPARATIONS, columns, _lines(cutoffs.xyz[rows.foot], cutoffs.xyz[rows.hanging]))


def confidence_layer(slips, faults):
    """CONFIDENCE: the region round the tip of every slip vector that has intervals."""
    rows = np.flatnonzero(np.isfinite(slips.region).all(axis=(1, 2)))
    outline = np.concatenate([slips.region[rows], slips.region[rows, :1]], axis=1)
    columns = {
        "fault": faults.name[slips.fault[rows]],
        "markers": slips.markers[rows],
        "level": np.full(len(rows), LEVEL),
    }
    return Layer(tables.CONFIDENCE, columns, shapely.polygons(outline) if len(rows) else np.zeros(0, object))


def problem_layer(problems, fault_rows=None, contact_rows=None):
    """PROBLEMS, with layer and feature where the problem concerns an input row. An unknown place has no geometry."""
    layers, features = [], []
    for problem in problems:
        rows, row = (contact_rows, problem.contact_row) if problem.contact_row >= 0 else (fault_rows, problem.fault_row)
        known = rows is not None and row >= 0
        layers.append(rows.layer[row] if known else "")
        features.append(rows.feature[row] if known else "")
    place = np.array([problem.xyz for problem in problems], float).reshape(-1, 3)
    place[:, 2] = np.nan_to_num(place[:, 2])
    geometry = np.full(len(place), None, object)
    drawn = np.isfinite(place).all(axis=1)
    if drawn.any():
        geometry[drawn] = shapely.points(place[drawn])
    columns = {
        "fault": [problem.fault for problem in problems],
        "marker": [problem.marker for problem in problems],
        "reason": [problem.reason for problem in problems],
        "advice": [problem.advice for problem in problems],
        "layer": layers,
        "feature": features,
    }
    return Layer(tables.PROBLEMS, columns, geometry)


def solution_layers(solved, faults, cutoffs, state, length, ground, turns):
    """All layers of solved faults but the problems. `turns`: arrays by fault, grid to true north and to the map's grid."""
    true_minus_grid, grid_turn = turns
    slips = slip_rows(solved, faults, cutoffs, ground, true_minus_grid)
    return [
        slip_layer(slips, faults, true_minus_grid, grid_turn),
        piercing_layer(slips, faults),
        cutoff_layer(faults, cutoffs, state, length, true_minus_grid, solved),
        separation_layer(solved, faults, cutoffs),
        confidence_layer(slips, faults),
    ]
