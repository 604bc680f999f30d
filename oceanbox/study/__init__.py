"""Studies: many runs from one file, their collected table, thresholds, memory and sensitivities."""
