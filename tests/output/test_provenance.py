"""A file says what made it, and nothing about where."""

from __future__ import annotations

import getpass
import re
import socket
import subprocess
from datetime import UTC, datetime, timedelta, timezone
from pathlib import Path

import oceanbox
from oceanbox.output import provenance
from tests.output.samples import CONFIG_TEXT, sample_attributes


def test_the_configuration_is_kept_character_by_character():
    attributes = sample_attributes()
    assert attributes[provenance.CONFIG_ATTRIBUTE] == CONFIG_TEXT
    assert attributes[provenance.IDENTITY_ATTRIBUTE] == "0" * 64
    assert attributes[provenance.VERSION_ATTRIBUTE] == oceanbox.__version__


def test_nothing_tells_the_host_the_person_or_a_folder():
    text = "\n".join(sample_attributes().values())
    assert not {socket.gethostname(), getpass.getuser()} & set(re.findall(r"[\w.-]+", text))
    assert not re.search(r"(^|\s)/\w+/", text)


def test_the_time_of_creation_is_in_universal_time():
    moment = datetime(2001, 2, 3, 1, 30, tzinfo=timezone(timedelta(hours=3)))
    attributes = provenance.global_attributes("t", "s", "", "", "", "", created=moment)
    assert attributes["date_created"] == "2001-02-02T22:30:00Z"
    now = datetime.strptime(sample_attributes()["date_created"], "%Y-%m-%dT%H:%M:%SZ").replace(tzinfo=UTC)
    assert abs(datetime.now(UTC) - now) < timedelta(minutes=5)


def _checkout(top: Path) -> str:
    """A repository with a package in it; returns the commit."""
    (top / "package").mkdir(parents=True)
    (top / "package" / "code.py").write_text("a = 1\n")
    identity = ["-c", "user.name=nobody", "-c", "user.email=nobody@example.invalid"]
    for arguments in (["init", "-q"], ["add", "."], [*identity, "commit", "-q", "-m", "first"]):
        subprocess.run(["git", "-C", str(top), *arguments], check=True, capture_output=True)
    done = subprocess.run(["git", "-C", str(top), "rev-parse", "HEAD"], check=True, capture_output=True, text=True)
    return done.stdout.strip()


def test_the_commit_of_a_checkout_is_named_and_its_changes_are_owned_up_to(tmp_path):
    commit = _checkout(tmp_path / "top")
    package = tmp_path / "top" / "package"
    assert provenance.source_commit(package) == commit
    (package / "code.py").write_text("a = 2\n")
    assert provenance.source_commit(package) == f"{commit}+changes"


def test_a_copy_installed_inside_another_repository_has_no_commit(tmp_path):
    _checkout(tmp_path / "top")
    installed = tmp_path / "top" / "environment" / "package"
    installed.mkdir(parents=True)
    assert provenance.source_commit(installed) == "none"
    assert provenance.source_commit(tmp_path) == "none"
