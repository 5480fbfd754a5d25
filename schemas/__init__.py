"""JSON Schemas that ship with specgate."""
