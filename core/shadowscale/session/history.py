"""Undo and redo: labelled snapshots of the session, which share whatever did not change."""

from __future__ import annotations

from dataclasses import dataclass

from shadowscale.session.session import Session

LENGTH = 200


@dataclass(frozen=True, eq=False)
class Step:
    """A state and the words for the change that led to it; `merge` names an open gesture."""

    label: str
    session: Session
    merge: str | None = None


class History:
    """What was done, in order, and where in it the work stands.

    Changes with the same merge key replace one another until `close` (a drag is one step).
    At most `length` steps are kept, the oldest go first.
    """

    def __init__(self, session: Session, *, length: int = LENGTH) -> None:
        if length < 1:
            raise ValueError(f"length must be at least 1, found {length}")
        self._length = length
        self._steps = [Step("start", session)]
        self._position = 0

    @property
    def session(self) -> Session:
        """The present state."""
        return self._steps[self._position].session

    @property
    def labels(self) -> tuple[str, ...]:
        """The words of all steps, the start included."""
        return tuple(step.label for step in self._steps)

    @property
    def position(self) -> int:
        """Index of the present step in `labels`."""
        return self._position

    @property
    def undo_label(self) -> str | None:
        """What `undo` would take back; None at the start."""
        return self._steps[self._position].label if self._position else None

    @property
    def redo_label(self) -> str | None:
        """What `redo` would do again; None at the end."""
        later = self._position + 1
        return self._steps[later].label if later < len(self._steps) else None

    def push(self, label: str, session: Session, *, merge: str | None = None) -> None:
        """Add a step after the present one; what had been undone is forgotten."""
        present = self._steps[self._position]
        self._steps = self._steps[: self._position + 1]
        if merge is not None and merge == present.merge:
            self._steps.pop()
        self._steps.append(Step(label, session, merge))
        self._steps = self._steps[-(self._length + 1) :]
        self._position = len(self._steps) - 1

    def amend(self, session: Session) -> None:
        """Replace the present state without a step, for results that arrive for it."""
        present = self._steps[self._position]
        self._steps[self._position] = Step(present.label, session, present.merge)

    def close(self) -> None:
        """End the gesture: the next change is a step of its own even with the same merge key."""
        present = self._steps[self._position]
        self._steps[self._position] = Step(present.label, present.session)

    def undo(self) -> Session:
        """Go one step back (nothing happens at the start); the state there."""
        self._position = max(0, self._position - 1)
        self.close()
        return self.session

    def redo(self) -> Session:
        """Go one step forward (nothing happens at the end); the state there."""
        self._position = min(len(self._steps) - 1, self._position + 1)
        self.close()
        return self.session
