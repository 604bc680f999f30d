"""Where cases run: worker processes on this machine, or an existing cluster engine."""

from oceanbox.study.engines.engine import Engine

__all__ = ["Engine"]
