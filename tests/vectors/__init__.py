"""Tests of vectors."""
