"""Tests of the proof."""
