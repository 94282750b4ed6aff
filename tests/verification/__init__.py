"""Published cases and exact solutions, run through cupfem's own mesh, operators and march.

- bodies: plain cylinders, strips and leaning walls as cupfem sections; steady states, marches
- drinks, tube: bodies that hold a drink
- compare: a found value against its target, with the error printed
- faults: planted faults, and that a check notices them
"""
