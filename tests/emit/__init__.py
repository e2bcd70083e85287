"""Tests of the emitted C."""
