"""Many variants of one network: the store that outlives the server, the runner, and how variants are computed."""
