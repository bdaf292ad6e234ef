"""Ledger to text. Everything here draws from the JSON document of a ledger, never from its objects."""
