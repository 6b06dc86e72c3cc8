[Version] 2.1
# kHz S DB
[Number of Ports] 2
[Two-Port Data Order] 12_21
[Number of Frequencies] 1
[Number of Noise Frequencies] 2
[Reference] 50 25
[Network Data]
5 -20 0 -40 90 6.0205999132796239 180 0 -90
[Noise Data]
1 0.8 0.4 100 0.30
2 1.1 0.35 130 0.25
[End]
