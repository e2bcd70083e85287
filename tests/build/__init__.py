"""Tests of build."""
