"""Where a line of steps stands in its text, and what comes next there.

A thread holds a stack of frames, the outermost first: the items of the sequence or of its branch, and inside of them
those of each loop and of each branch of a choice that it is in.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from seqcheck.machine.steps import Choice, Choose, Item, Jump, Repeat, Sequence, Step, Together
from tests.oracle.reads import Read


@dataclass(slots=True, eq=False)
class Frame:
    """``following`` is the number of the item that comes next; ``rounds`` are still to go, this one included."""

    owner: Repeat | Choice | None
    items: tuple[Item, ...]
    following: int = 0
    rounds: int = 1


@dataclass(slots=True, eq=False)
class Join:
    """The end of a ``together``: ``open`` branches are still under way, ``ends`` are the reads the others ended at."""

    together: Together
    thread: Thread
    open: int
    ends: list[Read] = field(default_factory=list)

    @property
    def name(self) -> str:
        return f"join {self.together.place.line}:{self.together.place.column}"

    def ready(self) -> bool:
        return self.open == 0 and all(read.passed for read in self.ends)


class Thread:
    """One line of steps under way: a whole sequence, or a branch of it that ends in ``join``."""

    def __init__(self, sequence: Sequence, items: tuple[Item, ...], join: Join | None) -> None:
        self.sequence = sequence
        self.join = join
        self._items = items
        self._frames = [Frame(None, items)]

    def next(self) -> Step | Together | Choose | Jump | None:
        """The next item that is more than a loop; None at the end."""
        while self._frames:
            frame = self._frames[-1]
            if frame.following < len(frame.items):
                item = frame.items[frame.following]
                frame.following += 1
                if not isinstance(item, Repeat):
                    return item
                self._frames.append(Frame(item, item.items, rounds=item.times))
            elif frame.rounds > 1:
                frame.rounds -= 1
                frame.following = 0
            else:
                self._frames.pop()
        return None

    def take(self, choice: Choice) -> None:
        """Go into a branch of a choice."""
        self._frames.append(Frame(choice, choice.items))

    def restart(self) -> None:
        self._frames = [Frame(None, self._items)]

    def jump(self, step: str) -> bool:
        """Go to a step: it comes next. A loop around both keeps its count, one that is come into begins anew. Gives
        whether this begins a cycle of the sequence."""
        path = _path_to(self._items, step)
        if path is None:
            raise AssertionError(f"{step} is not in this branch")
        frames: list[Frame] = []
        for depth, (owner, items, number) in enumerate(path):
            old = self._frames[depth] if depth < len(self._frames) and len(frames) == depth else None
            if old is not None and old.owner is owner:
                frames.append(old)
            else:
                self._frames = self._frames[:depth]
                frames.append(Frame(owner, items, rounds=owner.times if isinstance(owner, Repeat) else 1))
            frames[-1].following = number + 1
        frames[-1].following -= 1
        self._frames = frames
        return self.join is None and len(path) == 1 and path[0][2] == 0


def _path_to(items: tuple[Item, ...], step: str) -> list[tuple[Repeat | Choice | None, tuple[Item, ...], int]] | None:
    """The frames down to a step, each with the number of the item in it that leads there."""

    def inside(
        owner: Repeat | Choice | None, items: tuple[Item, ...]
    ) -> list[tuple[Repeat | Choice | None, tuple[Item, ...], int]] | None:
        for number, item in enumerate(items):
            here = (owner, items, number)
            if isinstance(item, Step) and item.name == step:
                return [here]
            blocks: tuple[Repeat | Choice, ...] = ()
            if isinstance(item, Repeat):
                blocks = (item,)
            elif isinstance(item, Choose):
                blocks = item.choices
            for block in blocks:
                further = inside(block, block.items)
                if further is not None:
                    return [here, *further]
        return None

    return inside(None, items)
