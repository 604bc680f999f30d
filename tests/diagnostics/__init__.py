"""Tests of the diagnostics."""
