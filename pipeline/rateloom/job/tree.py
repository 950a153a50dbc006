"""What a YAML text holds, as literal texts, blocks and lists that know their lines."""

from typing import TypeAlias

Tree: TypeAlias = "str | Block | Items | None"


class Block(dict[str, "Tree"]):
    """A mapping; ``lines`` tells where each key stands."""

    __slots__ = ("lines", "size")

    def __init__(self) -> None:
        super().__init__()
        self.lines: dict[str, int] = {}
        self.size = 1
        """Entries inside, aliases expanded."""


class Items(list["Tree"]):
    """A list; ``lines`` tells where each item stands."""

    __slots__ = ("lines", "size")

    def __init__(self) -> None:
        super().__init__()
        self.lines: list[int] = []
        self.size = 1


def line_of(tree: Tree, path: tuple[str | int, ...], start: int = 0) -> int:
    """Tell the line of an entry, or of the nearest block around it."""
    line = start
    for step in path:
        if isinstance(tree, Block) and step in tree:
            line, tree = tree.lines[str(step)], tree[str(step)]
        elif isinstance(tree, Items) and isinstance(step, int) and step < len(tree):
            line, tree = tree.lines[step], tree[step]
        else:
            break
    return line
