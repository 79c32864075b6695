"""Catalogue."""
