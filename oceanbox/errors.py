"""Every error the package raises on purpose.

OceanboxError
├── ConfigError         the configuration cannot be used; holds one `Fault` for each thing wrong with it
├── UnstableRun         the state left the range in which the equations mean anything
├── InterruptedRun      somebody or something stopped the run before its end; what was written can be resumed
├── ResultConflict      a result is already there and belongs to another configuration
└── UnreadableResult    a file is not a result of this package, or lacks what was asked of it

Anything else that escapes is a defect of the program, never of its input.
"""

# ruff: noqa: N818  (the names say what happened; the base class says that it is an error)

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace


class OceanboxError(Exception):
    """Base of all errors raised on purpose; its text is meant to be shown to the user as it is."""


@dataclass(frozen=True)
class Fault:
    """One thing wrong with a configuration.

    location    'file:line' of the offending key, or '' when the value came from no file
    key         dotted key, such as 'surface.wind.ramp_days'; '' for a fault of the whole file
    value       what was got, as text
    allowed     what is allowed
    remedy      what to do about it
    """

    location: str
    key: str
    value: str
    allowed: str
    remedy: str

    def __str__(self) -> str:
        place = "".join(f"{part}: " for part in (self.location, self.key) if part)
        return f"{place}got {self.value}; {self.allowed}; {self.remedy}"


class ConfigError(OceanboxError):
    """The configuration cannot be used; the text has one line per fault."""

    def __init__(self, faults: Iterable[Fault]) -> None:
        self.faults: tuple[Fault, ...] = tuple(faults)
        if not self.faults:
            raise ValueError("a ConfigError needs at least one Fault")
        super().__init__("\n".join(str(fault) for fault in self.faults))

    def located(self, locate: Callable[[str], str]) -> ConfigError:
        """The same error, each fault without a location given the one that `locate(dotted_key)` returns."""
        return ConfigError(
            fault if fault.location else replace(fault, location=locate(fault.key)) for fault in self.faults
        )


class UnstableRun(OceanboxError):
    """The state stopped being finite, or left the range in which the equations mean anything.

    what          what was found and where, as a sentence
    step          number of the step after which it was found
    model_days    model time of that step [days]
    remedy        what to change
    """

    def __init__(self, what: str, step: int, model_days: float, remedy: str) -> None:
        self.what = what
        self.step = step
        self.model_days = model_days
        self.remedy = remedy
        super().__init__(f"unstable at step {step} (day {model_days:.2f}): {what}; {remedy}")


class InterruptedRun(OceanboxError):
    """The run was stopped before its end.

    model_days    model time reached [days]
    remedy        how to go on from there
    """

    def __init__(self, model_days: float, remedy: str) -> None:
        self.model_days = model_days
        self.remedy = remedy
        super().__init__(f"interrupted at day {model_days:.2f}; {remedy}")


class ResultConflict(OceanboxError):
    """A result with the wanted name is already there and belongs to another configuration."""


class UnreadableResult(OceanboxError):
    """A file is not a result of this package, is damaged, or lacks a variable that was asked of it."""
