"""From the text of a spec file to a Spec, or to every mistake in it."""
