"""Files: results, snapshots and restart points. A file under its final name is always whole."""
