"""Sample axis, uncertainty, assumption tests, cautions, audits: from a calculation to its Record."""
