"""Time measurements, run by ``python -m tests.benchmarks`` and by CI, never by the unit tests."""
