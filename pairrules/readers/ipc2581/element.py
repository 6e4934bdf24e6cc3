"""An element of the file as the parser hands it over: a name without namespace, attributes, a line, what it holds."""

from __future__ import annotations

from collections.abc import Iterator

STEPS = frozenset({"PolyBegin", "PolyStepSegment", "PolyStepCurve"})
"""What outlines and lines consist of. A board has millions, so that they are no elements until they are asked for."""


Step = tuple[str, dict[str, str], int]
"""One of `STEPS`: its name, attributes, and line."""


class Element:
    """An element. Its steps stand apart from all else it holds; iteration gives both, the steps first."""

    __slots__ = ("attributes", "inner", "line", "steps", "tag")

    inner: list[Element] | tuple[()]
    steps: list[Step] | tuple[()]

    def __init__(self, tag: str, attributes: dict[str, str], line: int) -> None:
        self.tag, self.attributes, self.line = tag, attributes, line
        self.inner = self.steps = ()  # most elements hold nothing

    def get(self, name: str) -> str | None:
        """An attribute; `None` where the element has none of that name."""
        return self.attributes.get(name)

    def __iter__(self) -> Iterator[Element]:
        for step in self.steps:
            yield Element(*step)
        yield from self.inner

    def __len__(self) -> int:
        return len(self.steps) + len(self.inner)

    def __bool__(self) -> bool:
        return True
