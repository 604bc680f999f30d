"""Panels: each draws on given axes what a result file holds, and says in a sentence what it shows."""
