"""Tests of plans and their evaluator."""
