"""One change of a text: what is taken out and put in where, exact both ways."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass


class Misfit(ValueError):
    """An edit was applied to another text than the one it was made for."""


@dataclass(frozen=True, slots=True)
class Splice:
    """At character `start` of the base text `removed` stands, and `inserted` takes its place."""

    start: int
    removed: str
    inserted: str

    @property
    def end(self) -> int:
        return self.start + len(self.removed)


@dataclass(frozen=True, slots=True)
class Edit:
    """Splices on one base text, sorted, with at least one character between each and the next, and a label for people.

    Raises ValueError where they are not so; `Edit.of` sorts and joins them.
    """

    splices: tuple[Splice, ...]
    label: str = ""

    def __post_init__(self) -> None:
        end = -1
        for splice in self.splices:
            if splice.start <= end:
                raise ValueError("the splices of an edit must be sorted and apart")
            end = splice.end

    @classmethod
    def of(cls, splices: Iterable[Splice], label: str = "") -> Edit:
        """An edit of disjoint splices in any order: touching ones are joined, those that change nothing left out."""
        joined: list[Splice] = []
        for splice in sorted(splices, key=lambda one: (one.start, one.end)):
            if splice.removed == splice.inserted:
                continue
            if joined and splice.start == joined[-1].end:
                last = joined.pop()
                splice = Splice(last.start, last.removed + splice.removed, last.inserted + splice.inserted)
            joined.append(splice)
        return cls(tuple(joined), label)

    def __bool__(self) -> bool:
        return bool(self.splices)

    def apply(self, text: str) -> str:
        """`text` with the change made, all of it or none. Raises Misfit where `text` is not the base text."""
        parts: list[str] = []
        at = 0
        for splice in self.splices:
            if not text.startswith(splice.removed, splice.start) or splice.start > len(text):
                raise Misfit(f"character {splice.start} is not where {splice.removed!r} stands")
            parts += (text[at : splice.start], splice.inserted)
            at = splice.end
        return "".join((*parts, text[at:]))

    def inverse(self) -> Edit:
        """The edit that takes the changed text back to the base text."""
        shift = 0
        back: list[Splice] = []
        for splice in self.splices:
            back.append(Splice(splice.start + shift, splice.inserted, splice.removed))
            shift += len(splice.inserted) - len(splice.removed)
        return Edit(tuple(back), self.label)

    def then(self, other: Edit, label: str = "") -> Edit:
        """This edit and, on the text that it leaves, `other`, as one edit of this one's base text.

        Raises Misfit where `other` takes out what this one did not leave.
        """
        shift = 0  # from a character of the middle text to the base text, ahead of all that was met
        joined: list[Splice] = []
        for group in _groups(self.inverse().splices, other.splices):
            middle, base = _middle(group)
            before = _replace(middle, base, group.back)
            after = _replace(middle, base, group.on)
            joined.append(Splice(base + shift, before, after))
            shift += len(before) - len(middle)
        return Edit.of(joined, label or self.label)


@dataclass(slots=True)
class _Group:
    """Splices of the middle text that overlap or touch: `back` to the base text, `on` to the final one."""

    start: int
    end: int
    back: list[Splice]
    on: list[Splice]


def _groups(back: tuple[Splice, ...], on: tuple[Splice, ...]) -> list[_Group]:
    groups: list[_Group] = []
    marked = [(splice, False) for splice in back] + [(splice, True) for splice in on]
    for splice, forward in sorted(marked, key=lambda one: (one[0].start, one[0].end)):
        if not groups or splice.start > groups[-1].end:
            groups.append(_Group(splice.start, splice.end, [], []))
        group = groups[-1]
        group.end = max(group.end, splice.end)
        (group.on if forward else group.back).append(splice)
    return groups


def _middle(group: _Group) -> tuple[str, int]:
    """The middle text of a group, which its splices cover without a gap, and where it starts."""
    text = ""
    for splice in sorted((*group.back, *group.on), key=lambda one: (one.start, one.end)):
        at = splice.start - group.start
        known = text[at : at + len(splice.removed)]
        if not splice.removed.startswith(known):
            raise Misfit(f"the second edit does not fit what the first one leaves at character {splice.start}")
        text += splice.removed[len(known) :]
    return text, group.start


def _replace(text: str, start: int, splices: list[Splice]) -> str:
    """`text`, which begins at character `start`, with the splices done."""
    at = 0
    parts: list[str] = []
    for splice in splices:
        parts += (text[at : splice.start - start], splice.inserted)
        at = splice.end - start
    return "".join((*parts, text[at:]))
