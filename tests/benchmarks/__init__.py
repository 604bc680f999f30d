"""How fast a step is, against what it could be.  Not part of the default test run: ``python -m tests.benchmarks.run``."""
