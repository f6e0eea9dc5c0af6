"""The one tree of errors.

::

    CorymbError          anything that a user is told in one paragraph
    ├── InputError       a file or a value that cannot be used; says where, what, and how to mend it
    ├── SettingError     a setting out of its range, or two that contradict each other
    ├── LimitError       work that would not end; offers a remedy
    ├── ComputeError     a worker died, or a cluster could not be reached
    └── Cancelled        the user asked to stop; raised from a progress callable
"""

from __future__ import annotations


class CorymbError(Exception):
    """Anything that a user is told in one paragraph, without a traceback."""


class InputError(CorymbError):
    """A file that cannot be used.

    Parameters
    ----------
    where : str
        File name, as the user gave it.
    found : str
        What stands there.
    remedy : str
        What was expected, or how to mend it.
    line : int or None
        Line number counted from 1, where one line is to blame.
    """

    def __init__(self, where: str, found: str, remedy: str, line: int | None = None) -> None:
        place = where if line is None else f"{where}, line {line}"
        super().__init__(f"{place}: {found}; {remedy}")
        self.where = where
        self.found = found
        self.remedy = remedy
        self.line = line

    def __reduce__(self) -> tuple[type[InputError], tuple[str, str, str, int | None]]:
        """Pickle by the four parts, since an error may come back from a worker process."""
        return (type(self), (self.where, self.found, self.remedy, self.line))


class SettingError(CorymbError):
    """A setting out of its range, or two settings that contradict each other."""


class LimitError(CorymbError):
    """Work that would not end in reasonable time or memory; the message offers a remedy."""


class ComputeError(CorymbError):
    """A worker died more often than is allowed, or a cluster could not be reached."""


class Cancelled(CorymbError):
    """The user asked to stop. Raised from inside a progress callable."""
