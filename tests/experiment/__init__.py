"""Runs as a whole: interrupted, killed, finished, unstable."""
