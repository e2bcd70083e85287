"""Tests of the range analysis, against every frame of small filters and published widths."""
