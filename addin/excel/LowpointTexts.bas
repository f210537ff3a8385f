Option Explicit
Option Private Module

Public Sub LpDescribeAll()
    LowpointLiquidsTell
    LowpointValvesTell
    LowpointIndicesLimitsTell
    LowpointOrificesTell
    LowpointWorkingTell
End Sub
