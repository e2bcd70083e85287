"""Every line of C that guardbit can write."""
