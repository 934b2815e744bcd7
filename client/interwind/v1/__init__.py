"""Generated from proto/interwind/v1 by deploy/generate.py; never edited."""

SOURCE_SHA256 = "2a859b914d89fef758e9ebe3f65ad9d594874b4724379fd9894aa4475f0ce664"
