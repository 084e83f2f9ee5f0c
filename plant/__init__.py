"""The works: its ledger, and everything that is computed from it."""
