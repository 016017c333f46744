"""The checks, one module a family; each module lists its own as `CHECKS`."""
