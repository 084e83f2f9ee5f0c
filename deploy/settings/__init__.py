"""Settings: base is shared; development, testing and production each say only what differs."""
