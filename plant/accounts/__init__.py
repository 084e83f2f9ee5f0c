"""The person: who signs in. What a person may do at a works is a statement of that works (plant.works)."""
