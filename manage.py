#!/usr/bin/env python3
"""Weirbook's command line."""

import os
import sys

from django.core.management import execute_from_command_line


def main() -> None:
    os.environ.setdefault("DJANGO_SETTINGS_MODULE", "deploy.settings.development")
    execute_from_command_line(sys.argv)


if __name__ == "__main__":
    main()
