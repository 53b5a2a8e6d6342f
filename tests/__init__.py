"""Tests of hairpin; `tests.reference` has the values that results are held against, `tests.campaign` the large uncertainty campaign."""
