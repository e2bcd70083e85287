"""Tests of the C front end and the machine."""
