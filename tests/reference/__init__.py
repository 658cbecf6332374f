"""What the tests compare with: exact displacement fields and stored solutions."""
