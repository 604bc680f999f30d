"""How a run ended, as a value: the caller decides what is a failure."""

from dataclasses import dataclass
from enum import Enum

__all__ = ["Ending", "Outcome"]


class Ending(Enum):
    """The ways a run can end."""

    EQUILIBRIUM = "equilibrium"
    NOT_IN_EQUILIBRIUM = "not in equilibrium"
    COMPLETED = "completed"


@dataclass(frozen=True)
class Outcome:
    """The ending and its sentence, with the numbers that go with it."""

    ending: Ending
    sentence: str

    def __str__(self) -> str:
        return self.sentence
