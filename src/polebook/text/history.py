"""Every edit of one text since it was opened: undone and redone to the character, runs of small ones as one."""

from __future__ import annotations

from dataclasses import dataclass, replace

from polebook.text.edit import Edit

RUN_SECONDS = 1.0  # edits of one run that follow each other within this time are one step


@dataclass(frozen=True, slots=True)
class Step:
    """One step of undo. `run` names the run that a further edit may still join, "" for none; `at` is in seconds."""

    edit: Edit
    run: str = ""
    at: float = 0.0


@dataclass(frozen=True, slots=True)
class History:
    """A text and its edits. `disk` is the text as it stands in the file, None where there is no file."""

    text: str
    disk: str | None = None
    past: tuple[Step, ...] = ()
    future: tuple[Step, ...] = ()  # the next to redo last

    @property
    def saved(self) -> bool:
        """Whether the file holds the text as it is."""
        return self.text == self.disk

    def joins(self, run: str, now: float) -> bool:
        """Whether an edit of `run` at `now` would become part of the last step."""
        return bool(run and self.past and not self.future and self.past[-1].run == run
                    and 0.0 <= now - self.past[-1].at <= RUN_SECONDS)

    def apply(self, edit: Edit, now: float = 0.0, run: str = "", label: str = "") -> History:
        """The text with `edit` done. One that changes nothing leaves the history alone.

        An edit that `joins` the last step becomes one with it under the label `label`, else under its own; where the
        two cancel each other the step is gone. Raises Misfit where `edit` was made for another text.
        """
        if not edit:
            return self
        text = edit.apply(self.text)
        past = self.past
        if self.joins(run, now):
            edit, past = past[-1].edit.then(edit, label or edit.label), past[:-1]
        if edit:
            past = (*past, Step(edit, run, now))
        return replace(self, text=text, past=past, future=())

    def undo(self) -> History:
        """The text before the last step; itself where nothing is left."""
        if not self.past:
            return self
        step = self.past[-1]
        return replace(self, text=step.edit.inverse().apply(self.text), past=_closed(self.past[:-1]),
                       future=(*self.future, step))

    def redo(self) -> History:
        """The text after the step that was undone last; itself where nothing is left."""
        if not self.future:
            return self
        step = self.future[-1]
        return replace(self, text=step.edit.apply(self.text), past=(*self.past, replace(step, run="")),
                       future=self.future[:-1])

    def before_last(self) -> str:
        """The text before the last step."""
        return self.past[-1].edit.inverse().apply(self.text) if self.past else self.text

    def marked(self, disk: str | None) -> History:
        """The history with `disk` as the text that the file holds. No edit joins a step from before that."""
        return replace(self, disk=disk, past=_closed(self.past))


def _closed(past: tuple[Step, ...]) -> tuple[Step, ...]:
    return (*past[:-1], replace(past[-1], run="")) if past and past[-1].run else past
