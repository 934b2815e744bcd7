"""What drives a network: waveforms as generators, and the instants at which they change."""
