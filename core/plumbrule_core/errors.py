"""Errors that reach a person: each carries one sentence saying what is wrong and what would be right."""


class PlumbruleError(Exception):
    """An error whose text is written for the person at the screen."""


class Refused(PlumbruleError):
    """The input is wrong; carries every fault that was found, not the first alone."""

    def __init__(self, faults: tuple[object, ...]) -> None:
        self.faults = faults
        super().__init__("\n".join(str(fault) for fault in faults))


class Unreadable(PlumbruleError):
    """A file cannot be read as what it claims to be; the sentence names the line and the reason."""


class CasebookError(PlumbruleError):
    """A casebook cannot be opened or written."""


class UnlikeRecipes(PlumbruleError):
    """Two energies of different recipes were about to be subtracted."""


class Stopped(Exception):
    """Raised inside a worker when the user asked it to stop."""
