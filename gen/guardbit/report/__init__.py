"""What a person or a machine reads: sentences, terminal text, the certificate's JSON."""
