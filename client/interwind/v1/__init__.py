"""Generated from proto/interwind/v1 by deploy/generate.py; never edited."""

SOURCE_SHA256 = "744222aa0892e7e96004be338f9c51d0bd44278fc93f2ff92721a2f117c99781"
