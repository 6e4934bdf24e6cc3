"""The errors a user can cause: each names the file, the place in it, what was found and the remedy, in one line.

Only the command line catches them. `exit_status` is what the command then ends with.
"""

from __future__ import annotations


class UserError(Exception):
    """What a user can mend.

    Parameters
    ----------
    file: the file concerned, as the user named it; empty where no file is.
    place: where in the file: a line ("line 12"), a path ("tracks[12].width"), or empty.
    found: what is wrong there.
    remedy: what to do about it.
    """

    exit_status = 2

    def __init__(self, found: str, *, file: str = "", place: str = "", remedy: str = "") -> None:
        self.file = file
        self.place = place
        self.found = found
        self.remedy = remedy
        super().__init__(self._sentence())

    def _sentence(self) -> str:
        head = f"{self.file}: " if self.file else ""
        where = f"{self.place}: " if self.place else ""
        tail = f"; {self.remedy}" if self.remedy else ""
        return f"{head}{where}{self.found}{tail}"


class UsageError(UserError):
    """The command was called in a way it cannot follow."""


class SettingsError(UserError):
    """A settings, rule set or waiver file is wrong. `faults` holds all of them, one sentence each."""

    def __init__(
        self, found: str, *, file: str = "", place: str = "", remedy: str = "", others: tuple[SettingsError, ...] = ()
    ) -> None:
        super().__init__(found, file=file, place=place, remedy=remedy)
        self.others = others

    @property
    def faults(self) -> tuple[str, ...]:
        """Every fault of the file, this one first."""
        return (str(self), *(str(other) for other in self.others))


class BoardError(UserError):
    """The board file could not be read."""

    exit_status = 3
