! a pair of lines that nobody made
[Version] 2.0
# GHz S RI R 50
[Number of Ports] 4
[Number of Frequencies] 2
[Reference] 45 50
   45 55        ! goes on
[matrix format] lower
[Mixed-Mode Order] D1,3 C1,3 S4 S2
[Begin Information]
[Bench] 7       ! anything may stand here
any words
[End Information]
[Network Data]
1 0.11 -0.11
  0.21 -0.21 0.22 -0.22
  0.31 -0.31 0.32 -0.32 0.33 -0.33
  0.41 -0.41 0.42 -0.42 0.43 -0.43 0.44 -0.44
2 1.11 0  1.21 0 1.22 0  1.31 0 1.32 0 1.33 0  1.41 0 1.42 0 1.43 0 1.44 0
[End]
