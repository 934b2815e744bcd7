"""Generated from proto/interwind/v1 by deploy/generate.py; never edited."""

SOURCE_SHA256 = "d90a26acb198c67f157c219e81667b52b2943acbc66bd9cbf3148cac63622e2a"
