"""Where observations of equal or near values go so that each can be seen: side by side, by a fixed rule.

Points are taken in order of value, equal values in the order of the file. Each goes to the free lane nearest
the middle line: 0, +1, -1, +2, -2 ... lanes of one dot's width. Nothing is random.
"""

from collections.abc import Sequence


def lanes(places: Sequence[float], diameter: float) -> list[int]:
    """The lane of each dot of `diameter` whose centre along the axis is in `places`."""
    order = sorted(range(len(places)), key=lambda index: (places[index], index))
    chosen = [0] * len(places)
    last_in_lane: dict[int, float] = {}
    for index in order:
        lane = 0
        while places[index] - last_in_lane.get(lane, float("-inf")) < diameter:
            lane = -lane + 1 if lane <= 0 else -lane
        last_in_lane[lane] = places[index]
        chosen[index] = lane
    return chosen


def offsets(chosen: Sequence[int], diameter: float, room: float) -> list[float]:
    """How far above the lowest lane each dot lies; lanes move closer where they have `room` in all."""
    lowest = min(chosen, default=0)
    reach = max(chosen, default=0) - lowest
    spacing = min(diameter, room / reach) if reach else 0.0
    return [(lane - lowest) * spacing for lane in chosen]
