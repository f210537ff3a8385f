Option Explicit
Option Private Module

Public Sub LowpointWorkingTell()
    LpTell "LP_WHY", "Working: why a call errs, or its cautions and the basis of its answer, in words; ""ok"" otherwise.", "Lowpoint working", Array("name of the function that is asked about, as text, for example ""LP_SIGMA"" (required)", "the arguments of that function, in its order")
End Sub
