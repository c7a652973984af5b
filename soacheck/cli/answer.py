"""What a command gives back, and the exit statuses."""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum


class ExitStatus(IntEnum):
    """What the shell sees. The worst of several stages is the one that comes later in `SEVERITY`."""

    WITHIN = 0
    EXCEEDS = 1
    INPUT = 2
    UNPROVEN = 3
    MARGINAL = 4
    FAULT = 70  # in soacheck itself: never to be taken for a verdict
    OUTPUT = 74
    INTERRUPTED = 130
    BROKEN_PIPE = 141


SEVERITY = (
    ExitStatus.WITHIN,
    ExitStatus.MARGINAL,
    ExitStatus.UNPROVEN,
    ExitStatus.EXCEEDS,
    ExitStatus.INPUT,
)


def worst(verdicts: tuple[str, ...]) -> ExitStatus:
    """The exit status for the words of one or more verdicts."""
    return max((ExitStatus[word.upper()] for word in verdicts), key=SEVERITY.index)


@dataclass(frozen=True, slots=True, kw_only=True)
class Answer:
    """Text for standard output, text for standard error, exit status."""

    text: str = ""
    notes: str = ""
    status: ExitStatus = ExitStatus.WITHIN
