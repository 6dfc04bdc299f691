"""The compiled hot loop: one cohort of electrons, plain arrays in and out.

No files, no classes, no checks: the package `swarm` prepares the arrays and reads the sums.

Units, used everywhere in this package
--------------------------------------
speed     sqrt(eV): w^2 is the kinetic energy in eV; 1 sqrt(eV) is SPEED_1_EV = sqrt(2 e / m) = 593.1 km/s
time      1 / (N x 1e-20 m^2 x SPEED_1_EV), so that a collision frequency is w x (cross section / 1e-20 m^2)
length    1 / (N x 1e-20 m^2)
field     acceleration in these units: (E/N) / 2e-20 V m^2; 1 Td is 0.05

The gas density N drops out: E/N is the only field parameter. It returns with three-body processes, whose cross
sections are multiplied by the density of the third body before they come here.
"""
