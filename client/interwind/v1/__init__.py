"""Generated from proto/interwind/v1 by deploy/generate.py; never edited."""

SOURCE_SHA256 = "51afd1b82da8023735072cf393361c9c1011d6a5c7e66f172ef521d0a0f012da"
