"""What every test may use. Servers and the data folder: services.py; Chromium: browser.py."""
