"""Typed TOML in, checked tables and every fault at once out."""
