"""Generated from proto/interwind/v1 by deploy/generate.py; never edited."""

SOURCE_SHA256 = "fada90458acb9dca533f3827992c86dbfeadbaf8879583bb37fd94ff96112d87"
