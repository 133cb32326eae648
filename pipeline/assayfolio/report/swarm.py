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


def offsets(places: Sequence[float], diameter: float, room: float) -> list[float]:
    """The distance of each dot from the middle line; lanes move closer where `room` to a side is small."""
    chosen = lanes(places, diameter)
    reach = max((abs(lane) for lane in chosen), default=0)
    spacing = min(diameter, room / reach) if reach else 0.0
    return [lane * spacing for lane in chosen]
