"""The command line: parse, call, render, exit."""

from __future__ import annotations

from georoute.cli.app import main

__all__ = ["main"]
