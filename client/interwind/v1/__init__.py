"""Generated from proto/interwind/v1 by deploy/generate.py; never edited."""

SOURCE_SHA256 = "02f0bd974d9c35173fa74737e50c67057f94dd5802eff62c0c7abbfc0f68985c"
