"""What is written for the reader: tables, charts and pictures; no figure is computed here."""
