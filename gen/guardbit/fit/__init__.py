"""From a spec to a filter: fitted taps, resolved formats, geometry."""
