"""The append-only record: schema, store, hash chain."""
