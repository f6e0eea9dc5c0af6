"""The tests of corymb; `python -m tests` runs them all."""
