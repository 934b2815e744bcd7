"""Generated from proto/interwind/v1 by deploy/generate.py; never edited."""

SOURCE_SHA256 = "37ae013ae2fc19ab530ea894e01c6e8a55b7888114348408e1144663a66d1b35"
