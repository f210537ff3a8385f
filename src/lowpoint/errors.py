"""The errors that a user can meet: each says what was wrong, what was asked for, what came, and what to do."""

from __future__ import annotations

__all__ = ["BookError", "DeclarationError", "LowpointError"]


class LowpointError(Exception):
    """A problem that the user can cure; ``str()`` of it is the whole message.

    ``exit_code`` is what the command line ends with: 2, misuse, unless a subclass or caller says otherwise.
    """

    exit_code = 2

    def __init__(self, subject: str, must: str, got: str | None = None, remedy: str = "") -> None:
        self.subject = subject
        self.must = must
        self.got = got
        self.remedy = remedy
        sentence = f"{subject}: {must}" + (f", got {got}" if got is not None else "")
        super().__init__(f"{sentence}." + (f" {remedy}" if remedy else ""))

    @classmethod
    def plain(cls, text: str, exit_code: int = 2) -> LowpointError:
        """An error whose message is one free sentence."""
        error = cls.__new__(cls)
        Exception.__init__(error, text)
        error.subject, error.must, error.got, error.remedy = text, "", None, ""
        error.exit_code = exit_code
        return error

    def __reduce__(self) -> tuple[object, ...]:
        # Workers send errors home by pickle; the default would call __init__ with the finished sentence.
        return (_rebuild, (type(self), str(self), dict(self.__dict__)))


class BookError(LowpointError):
    """A workbook that cannot be read or written."""


class DeclarationError(LowpointError, TypeError):
    """A kernel declared wrongly: found when its module is imported, never later."""

    exit_code = 70


def _rebuild(kind: type[LowpointError], text: str, state: dict[str, object]) -> LowpointError:
    error = kind.__new__(kind)
    Exception.__init__(error, text)
    error.__dict__.update(state)
    return error
