"""What then happens: in frequency, in time, in the periodic state, with the evidence for it.

The modules at the top are what the engine calls; each floor below them may use only floors further down:

    steady -> smooth -> switched -> drive, request
    steady -> linear -> sinusoidal -> equations, request
    linear -> drive
    stacked -> equations
"""
