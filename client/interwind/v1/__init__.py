"""Generated from proto/interwind/v1 by deploy/generate.py; never edited."""

SOURCE_SHA256 = "72884618f8213e633cbf70e02719acd6a6197fba596f799882d76ec5781e6b3b"
