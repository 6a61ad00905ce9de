"""The command line, without a terminal: each command takes its arguments and says what it found."""

from engine.job.commands.commands import (
    COMMANDS,
    main,
)

__all__ = [
    "COMMANDS",
    "main",
]
