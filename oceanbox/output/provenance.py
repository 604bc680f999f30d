"""Where a file comes from: global attributes by the CF and ACDD conventions."""

from __future__ import annotations

import subprocess
from collections.abc import Sequence
from datetime import UTC, datetime
from pathlib import Path

import oceanbox

CONFIG_ATTRIBUTE = "oceanbox_config"
IDENTITY_ATTRIBUTE = "oceanbox_config_identity"
OUTCOME_ATTRIBUTE = "oceanbox_outcome"
VERSION_ATTRIBUTE = "oceanbox_version"
COMMIT_ATTRIBUTE = "oceanbox_commit"

CAUTION = (
    "An idealised model of an invented ocean, made for understanding. "
    "Not for forecasts of the real ocean and not a basis for decisions."
)
_KEYWORDS = (
    "ocean",
    "idealised model",
    "reduced gravity",
    "thermocline",
    "heat budget",
    "water-mass transformation",
)
_GIT_SECONDS = 10.0


def global_attributes(
    title: str,
    summary: str,
    config_text: str,
    config_identity: str,
    outcome: str,
    references: str,
    keywords: Sequence[str] = _KEYWORDS,
    created: datetime | None = None,
) -> dict[str, str]:
    """Global attributes of a file. They say nothing about the host or the person that ran the model.

    title, summary    one sentence each on what the run is
    config_text       the whole resolved configuration, from which the run can be repeated
    config_identity   hash of all that affects the physics
    outcome           how the run ended, as a sentence
    references        published sources of the equations
    created           time of creation; now, if not given
    """
    moment = (created or datetime.now(UTC)).astimezone(UTC).strftime("%Y-%m-%dT%H:%M:%SZ")
    commit = source_commit(Path(oceanbox.__file__).resolve().parent)
    program = f"oceanbox {oceanbox.__version__}"
    return {
        "Conventions": "CF-1.11, ACDD-1.3",
        "title": title,
        "summary": summary,
        "keywords": ", ".join(keywords),
        "comment": CAUTION,
        "source": f"{program}, a reduced-gravity ocean model",
        "institution": "not stated",
        "references": references,
        "history": f"{moment}: computed by {program}",
        "date_created": moment,
        "processing_level": "model result",
        "product_version": oceanbox.__version__,
        "standard_name_vocabulary": "CF Standard Name Table v93",
        VERSION_ATTRIBUTE: oceanbox.__version__,
        COMMIT_ATTRIBUTE: commit,
        IDENTITY_ATTRIBUTE: config_identity,
        OUTCOME_ATTRIBUTE: outcome,
        CONFIG_ATTRIBUTE: config_text,
    }


def source_commit(package: Path) -> str:
    """Commit of the checkout whose top folder holds `package`, '+changes' added if its files differ from it.

    'none' if the package does not run from a checkout; a repository that merely contains an installed copy is not one.
    """
    top = _git(package, "rev-parse", "--show-toplevel")
    commit = _git(package, "rev-parse", "--verify", "HEAD")
    if top is None or commit is None or Path(top).resolve() != package.parent:
        return "none"
    changes = _git(package, "status", "--porcelain", "--", ".")
    return commit if changes == "" else f"{commit}+changes"


def _git(folder: Path, *arguments: str) -> str | None:
    """Output of a git command in `folder`; None if it fails or git is not there."""
    command = ["git", "-C", str(folder), *arguments]
    try:
        done = subprocess.run(command, capture_output=True, text=True, timeout=_GIT_SECONDS, check=True)
    except (OSError, subprocess.SubprocessError):
        return None
    return done.stdout.strip()
