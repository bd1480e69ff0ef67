"""Runs: events (one thing that happened), state (their fold), progress (what is open), decide (command to event)."""
