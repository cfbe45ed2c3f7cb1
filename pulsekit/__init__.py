"""PulseKit: from a periodic flow or pressure recording to wall shear, velocity profiles and pulsation along a line."""
