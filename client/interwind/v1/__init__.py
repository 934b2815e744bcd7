"""Generated from proto/interwind/v1 by deploy/generate.py; never edited."""

SOURCE_SHA256 = "9b70e93727111a9c5917fe3c62ba8dc413313491cbc3c5329f4950b6a3e16cb1"
