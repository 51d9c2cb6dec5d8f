"""Benchmarks are programs, not tests: pytest collects nothing here."""

collect_ignore_glob = ["*.py"]
