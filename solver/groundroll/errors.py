"""Every failure a user can meet, each with the exit status of the command line."""


class GroundrollError(Exception):
    """Base of all errors raised on purpose; its text is the whole message shown to the user."""

    exit_status = 1


class InputError(GroundrollError):
    """The scenario or an argument is wrong; nothing has been written."""

    exit_status = 2


class ComputationError(GroundrollError):
    """The computation failed (a field blew up); what was recorded is kept."""

    exit_status = 3


class StorageError(GroundrollError):
    """Records could not be written or read."""

    exit_status = 4


class Interrupted(GroundrollError):
    """The user stopped the run; what was recorded is kept."""

    exit_status = 130
