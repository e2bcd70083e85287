"""Tests of the sentences, the terminal text and the certificate."""
