"""Generated from proto/interwind/v1 by deploy/generate.py; never edited."""

SOURCE_SHA256 = "ca0d9e9912cf69d718d0b8f76aa2013eb5b94556a17d7f2bfc1a0945165f14df"
