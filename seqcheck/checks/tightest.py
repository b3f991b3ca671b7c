"""Which of many bounds to work out: of all that stand for one thing only the tightest counts, and what is broken.

Takes for each what it stands for and a margin that plain intervals leave at the least; gives those that count. Plain
intervals cost next to nothing, and mostly show that the same comes with more to spare elsewhere.
"""

from __future__ import annotations

from collections.abc import Callable, Hashable, Iterable, Sequence


def those_that_count(
    asked: Sequence[tuple[Hashable, int]], margins_of: Callable[[Sequence[int]], Iterable[int]]
) -> list[int]:
    """By number, in their order: of each key the first that has the least margin, and whatever may be broken.
    ``asked``: keys, and a margin that none of them undercuts. ``margins_of``: works out those of some of them."""
    likeliest: dict[Hashable, int] = {}
    for number, (key, least) in enumerate(asked):
        known = likeliest.get(key)
        if known is None or least < asked[known][1]:
            likeliest[key] = number
    first = list(likeliest.values())
    tightest = dict(zip(likeliest, zip(margins_of(first), first, strict=True), strict=True))
    more = [
        number
        for number, (key, least) in enumerate(asked)
        if number != likeliest[key] and (least < 0 or (least, number) < tightest[key])
    ]
    margins_of(more)
    return sorted([*first, *more])
