"""Journeys."""
