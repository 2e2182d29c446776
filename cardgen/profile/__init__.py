"""Profiles: YAML in, frozen dataclasses out, every problem with its place."""
