"""Generated from proto/interwind/v1 by deploy/generate.py; never edited."""

SOURCE_SHA256 = "314ecca42f0ccc9ed86ff61f5ed1493f50fcc9bbe662e9919cfcde63c6a1950a"
