"""The tests, mirroring the source, with journeys through several apps and guards that walk the project."""
