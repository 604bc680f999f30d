"""From a configuration to a run: assembly, the run loop, and what becomes of it."""
