"""Stimulus frames, the responses that the reference gives, and what changes of a tap they show."""
