"""How each figure of the ledger came about: a file for each section of the document."""
