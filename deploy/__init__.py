"""How Weirbook is put together and run: sees every app, is seen by none."""
