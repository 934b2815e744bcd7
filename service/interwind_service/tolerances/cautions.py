"""Limits above which a caution is due."""

# Steady touch limits, IEC 62368-1:2018 Table 4, from memory: below ES1 nothing is felt that hurts, above ES2 it may
# kill. The alternating ones hold up to 1 kHz and are kept above it, on the safe side.
ES1_PEAK_V = 42.4
ES2_PEAK_V = 70.7
ES1_DIRECT_V = 60.0
ES2_DIRECT_V = 120.0
# Charge of a touchable capacitor, IEC 60335-1 clause 8.1.4 as quoted in a public forum thread (looked up): 45 µC,
# which is also 0.1 µF at 450 V.
TOUCH_CHARGE_C = 45e-6
# Capacitors from 100 V and 10 J on: shock; below 100 V from 100 J on: burns. Electrical safety manual of a national
# laboratory (LBNL), tables 2.2.13 and 2.3.5, looked up. The 10 J are taken for magnetic fields too: common practice,
# no source.
SHOCK_CAPACITOR_V = 100.0
SHOCK_ENERGY_J = 10.0
THERMAL_ENERGY_J = 100.0
# What counts as a current transformer that stands open: turns ratio, coupling and burden. Common practice, no source.
CURRENT_TRANSFORMER_RATIO = 10.0
CURRENT_TRANSFORMER_COUPLING = 0.9
CURRENT_TRANSFORMER_BURDEN_OHM = 10e3
