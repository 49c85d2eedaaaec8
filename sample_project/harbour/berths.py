"""Who lies alongside, and when it is too many."""

from __future__ import annotations

from collections.abc import Iterable

Stay = tuple[int, int]
"""Minute of mooring, minute of leaving; the berth is free again at the second."""


def busiest_moment(stays: Iterable[Stay]) -> tuple[int, int]:
    """The first minute at which most ships lie alongside, and how many: a sweep over sorted events.

    Nobody at all gives (0, 0).
    """
    events = []
    for moored, left in stays:
        events.append((moored, 1))
        events.append((left, -1))
    # At the same minute the ships that leave come before those that moor.
    events.sort()
    alongside = most = minute = 0
    for when, change in events:
        alongside += change
        if alongside > most:
            most, minute = alongside, when
    return minute, most
