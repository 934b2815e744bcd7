"""Generated from proto/interwind/v1 by deploy/generate.py; never edited."""

SOURCE_SHA256 = "3e3835b9ba2f7ce9a7cc55edbaa5725268099f600123b94c870be4e40c3ef747"
