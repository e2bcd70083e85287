"""The search for word lengths that reach a goal."""
