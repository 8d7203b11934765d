"""Shipped data (TOML), each value with its source; read by the modules beside this folder."""
