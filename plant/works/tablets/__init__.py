"""Tablets that several people share: enrolled by a supervisor, a name and a PIN for a sign-in, entry and nothing else."""
