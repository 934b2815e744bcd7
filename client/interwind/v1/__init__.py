"""Generated from proto/interwind/v1 by deploy/generate.py; never edited."""

SOURCE_SHA256 = "94529ee53c39619351cee04e72b833f04d0e147c77ed200b8c9ce1d97d4fd4fb"
