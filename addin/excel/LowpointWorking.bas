Option Explicit

Public Function LP_WHY(function_, ParamArray arguments() As Variant)
    Dim given As Variant
    given = arguments
    LP_WHY = LpWhy(function_, given)
End Function
