"""Hydraulics of pipes and ducts: whole NumPy arrays in and out, SI base units only, nothing read or written.

`fluids` and `glycols` give properties, `friction` the loss of straight legs, `shapes` the cross-sections,
`fittings` loss coefficients and valves, `power` pumps and fans, `terminals` the drops of air terminals,
`smooth` the blend that joins two laws. Every function takes a number or an array and broadcasts.
"""
