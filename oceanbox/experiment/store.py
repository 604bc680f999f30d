"""The folder of one run: what lies in it, what a new run may do with it.

    result.nc       the result, under this name only when whole
    checkpoint.nc   where a run that has not ended goes on; removed when the result is whole
    state.nc        the state at the end, from which other runs can start; after a breakdown the last sound state
    config.yaml     the resolved configuration
    snapshots.nc    if asked for

A folder belongs to one configuration and one command.
"""

import hashlib
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from oceanbox.config import Config, identity, resolved_yaml
from oceanbox.errors import ResultConflict
from oceanbox.experiment.running import Run
from oceanbox.output.checkpoint import load_checkpoint, save_checkpoint
from oceanbox.output.files import part_of, publish

__all__ = ["Purpose", "Store", "file_digest"]

Array = NDArray[np.float64]


def file_digest(path: Path) -> str:
    """sha256 of a file's bytes."""
    return hashlib.sha256(path.read_bytes()).hexdigest()


@dataclass(frozen=True)
class Purpose:
    """What makes two runs the same run: the command, the configuration, and the state they start from."""

    command: str
    config: str  # identity of the configuration
    start: str  # digest of the state file started from, or ''

    @classmethod
    def of(cls, command: str, config: Config, start: Path | None) -> "Purpose":
        """The purpose of running ``config`` with ``command`` from the state file ``start``."""
        return cls(command, identity(config), file_digest(start) if start else "")

    def attributes(self) -> dict[str, str | int | float]:
        """As stored in checkpoints and results."""
        return {"oceanbox_command": self.command, "oceanbox_config_identity": self.config, "oceanbox_start": self.start}

    def matches(self, attributes: dict[str, Any]) -> bool:
        """Whether a file with these attributes was made for this purpose."""
        return all(attributes.get(name, "") == value for name, value in self.attributes().items())


class Store:
    """The folder of one run."""

    def __init__(self, folder: Path, purpose: Purpose) -> None:
        self.folder = folder
        self.purpose = purpose
        self.result = folder / "result.nc"
        self.checkpoint = folder / "checkpoint.nc"
        self.state = folder / "state.nc"
        self.config = folder / "config.yaml"
        self.snapshots = folder / "snapshots.nc"

    def finished(self) -> bool:
        """Whether the result of this very run is there.  Raises ResultConflict if another one is."""
        import netCDF4

        for path in (self.result, self.checkpoint):
            if not path.exists():
                continue
            if path == self.result:
                with netCDF4.Dataset(path, "r") as file:
                    attributes = {name: file.getncattr(name) for name in file.ncattrs()}
            else:
                attributes = load_checkpoint(path)[1]
            if not self.purpose.matches(attributes):
                raise ResultConflict(
                    f"{path}: got a file of another run ({attributes.get('oceanbox_command', 'unknown')} of configuration "
                    f"{str(attributes.get('oceanbox_config_identity', 'unknown'))[:12]}); a folder holds one run; "
                    "choose another folder with --into, or move that one away"
                )
        return self.result.exists()

    def prepare(self, config: Config) -> None:
        """Make the folder and write the resolved configuration."""
        self.folder.mkdir(parents=True, exist_ok=True)
        part = part_of(self.config)
        part.write_text(resolved_yaml(config), encoding="utf-8")
        publish(part, self.config)

    def resume(self, run: Run) -> bool:
        """Take over the checkpoint if there is one."""
        if not self.checkpoint.exists():
            return False
        arrays, attributes = load_checkpoint(self.checkpoint)
        run.restore(arrays, attributes)
        return True

    def save(self, run: Run) -> None:
        """Write the checkpoint."""
        save_checkpoint(
            self.checkpoint, run.checkpoint_arrays(), run.checkpoint_attributes() | self.purpose.attributes()
        )

    def save_state(self, run: Run) -> None:
        """Write the present state alone, to start other runs from."""
        arrays = {f"state__{name}": value for name, value in run.model.state._asdict().items()}
        save_checkpoint(self.state, arrays, {"days": run.model.clock.days} | self.purpose.attributes())

    def end(self) -> None:
        """The result is whole: nothing is left to resume."""
        self.checkpoint.unlink(missing_ok=True)
