"""Advancing the equations in time: the schemes, their stability limits, and the memory they carry between steps."""
