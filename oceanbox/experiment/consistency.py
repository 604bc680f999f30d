"""Placeholder while the checks are being written."""

from oceanbox.config import Config

__all__ = ["require_consistent"]


def require_consistent(config: Config) -> None:
    """To be written."""
