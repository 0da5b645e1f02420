"""Connected groups and chains of small things, without a loop over their vertices."""

import numpy as np


def components(count, a, b):
    """Smallest member of the group that each of `count` items belongs to, items a[i] and b[i] being linked."""
    label = np.arange(count)
    while True:
        low = np.minimum(label[a], label[b])
        before = label.copy()
        np.minimum.at(label, a, low)
        np.minimum.at(label, b, low)
        label = label[label]
        if np.array_equal(label, before):
            return label


def chains(count, link):
    """Order pieces into chains, ends joined as `link` says.

    Each of `count` pieces has two ends, 2 i (start) and 2 i + 1 (end); ``link[e]`` is the end that end e is joined
    to, or -1. Returns a list of chains, each a list of (piece, reversed). A ring starts anywhere.
    """
    done = np.zeros(count, bool)
    loose = [e for e in range(2 * count) if link[e] < 0]
    found = []
    for first in loose + list(range(0, 2 * count, 2)):
        if done[first // 2]:
            continue
        chain, end = [], first
        while end >= 0 and not done[end // 2]:
            piece, backwards = end // 2, end % 2 == 1
            done[piece] = True
            chain.append((piece, backwards))
            end = link[end ^ 1]
        found.append(chain)
    return found


def pairs_within(*keys):
    """All pairs of rows (i < j by position) that agree in every key, as two index arrays."""
    group = group_numbers(*keys)
    order = np.argsort(group, kind="stable")
    ends = np.searchsorted(group[order], group[order], side="right")
    later = ends - np.arange(len(order)) - 1
    first = np.repeat(np.arange(len(order)), later)
    step = np.arange(later.sum()) - np.repeat(np.cumsum(later) - later, later)
    return order[first], order[first + 1 + step]


def group_numbers(*keys):
    """Number of the group of each row, rows being together when they agree in every key."""
    number = np.zeros(len(keys[0]), int)
    for key in keys:
        _, code = np.unique(key, return_inverse=True)
        number = np.unique(number * (len(code) + 1) + code, return_inverse=True)[1]
    return number
