"""Panels over many runs: each draws on given axes what a collected dataset and its result files hold."""
