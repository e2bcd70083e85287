"""Tests of the commands, their processes and their output files."""
