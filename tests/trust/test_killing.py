"""Killed at random moments a writer leaves all or nothing; many writers lose nothing.

The short runs of tests/benchmarks/killing.py and writers.py, which say how to repeat the long ones.
"""


def test_a_killed_writer_leaves_all_or_nothing(script):
    killing = script("killing")
    found = killing.run(kills=12, seed=7, count=150)
    assert set(found) == {"import", "amend", "upgrade", "watch"}
    assert sum(sum(hits.values()) for hits in found.values()) == 12


def test_eight_processes_log_at_once(script, empty_store):
    script("writers").run(empty_store.where, processes=8, logs=10)
