Option Explicit
Option Private Module

' Calls to Python. An error never becomes text or nothing in a cell: a comparison would take that for a pass.

Private Server As Object
Private Trouble As String
Private TroubleAt As Date

' The value of a cell: what Python answers, a true error where it fails.
Public Function LpCell(ByVal called As String, ParamArray given() As Variant) As Variant
    Dim arguments As Variant
    On Error GoTo Failed
    arguments = given
    LpCell = LpAsked(called, arguments)
    Exit Function
Failed:
    LpCell = CVErr(2015)
End Function

' LP_WHY is asked anew each time, and tells what keeps Python from being asked.
Public Function LpWhy(ByVal about As Variant, ByVal given As Variant) As Variant
    Dim arguments() As Variant
    Dim k As Long
    On Error GoTo Failed
    ReDim arguments(0 To UBound(given) - LBound(given) + 1)
    arguments(0) = LpArgument(about)
    For k = LBound(given) To UBound(given)
        arguments(k - LBound(given) + 1) = LpArgument(given(k))
    Next k
    LpWhy = LpAsked("LP_WHY", arguments)
    Exit Function
Failed:
    LpWhy = "LP_WHY: the add-in cannot ask Python: " & LpLastLine(Err.Description) _
        & " 'lowpoint excel status' tells more."
End Function

' What Python says of itself has many lines, and the reason in the last one.
Private Function LpLastLine(ByVal told As String) As String
    Do While Right$(told, 1) = vbLf Or Right$(told, 1) = vbCr
        told = Left$(told, Len(told) - 1)
    Loop
    LpLastLine = Left$(Mid$(told, InStrRev(told, vbLf) + 1), 400)
End Function

Private Function LpAsked(ByVal called As String, ByVal given As Variant) As Variant
    Dim sent() As Variant
    Dim k As Long
    ReDim sent(0 To UBound(given) - LBound(given) + 1)
    sent(0) = LpMaker
    For k = LBound(given) To UBound(given)
        sent(k - LBound(given) + 1) = LpArgument(given(k))
    Next k
    LpAsked = LpAnswer(LpSent(called, sent))
End Function

' An argument left out is Empty, as a blank cell is; a range is its values, without dates and currencies.
Private Function LpArgument(Optional ByVal given As Variant) As Variant
    If IsMissing(given) Then Exit Function
    If Not IsObject(given) Then
        LpArgument = given
    ElseIf TypeName(given) <> "Range" Then
        Err.Raise 5, , "an argument is neither a value nor a range."
    ElseIf given.Areas.Count > 1 Then
        Err.Raise 5, , "a range has several areas; give one of them at a time."
    Else
        LpArgument = given.Value2
    End If
End Function

' Python is started at the first call, once more if it died since, and after a failure not again for a while.
Private Function LpSent(ByVal called As String, ByRef sent() As Variant) As Variant
    Dim again As Boolean
    On Error GoTo Lost
Connected:
    If Server Is Nothing Then LpConnect
    LpSent = Server.CallUDF("lowpoint.faces.excel_addin.udfs", (called), sent, Empty, Empty)
    Exit Function
Lost:
    If Server Is Nothing Or again Then Err.Raise 5, , Err.Description
    Set Server = Nothing
    again = True
    Resume Connected
End Function

Private Sub LpConnect()
    Dim found As Object
    If Trouble <> "" And DateDiff("s", TroubleAt, Now) < 30 Then Err.Raise 5, , Trouble
    On Error GoTo Failed
    Set found = LpServer()
    Set Server = found
    Trouble = ""
    Exit Sub
Failed:
    Trouble = Err.Description
    TroubleAt = Now
    Err.Raise 5, , Trouble
End Sub

' Errors come as marked texts with the number of the error.
Private Function LpAnswer(ByVal answer As Variant) As Variant
    Dim i As Long, j As Long
    If Not IsArray(answer) Then
        LpAnswer = LpValue(answer)
        Exit Function
    End If
    If LpColumns(answer) < 0 Then
        For i = LBound(answer) To UBound(answer)
            If VarType(answer(i)) = vbString Then answer(i) = LpValue(answer(i))
        Next i
    Else
        For i = LBound(answer, 1) To UBound(answer, 1)
            For j = LBound(answer, 2) To UBound(answer, 2)
                If VarType(answer(i, j)) = vbString Then answer(i, j) = LpValue(answer(i, j))
            Next j
        Next i
    End If
    LpAnswer = answer
End Function

' The last column of an array, -1 where it is one row.
Private Function LpColumns(ByVal answer As Variant) As Long
    LpColumns = -1
    On Error Resume Next
    LpColumns = UBound(answer, 2)
End Function

Private Function LpValue(ByVal answer As Variant) As Variant
    LpValue = answer
    If VarType(answer) = vbString Then
        If Left$(answer, 1) = Chr$(1) Then LpValue = CVErr(CLng(Mid$(answer, 2)))
    End If
End Function

' Texts of the function wizard. Excel takes them for the macros of a book that can be seen only.
Public Sub LpDescribe()
    On Error Resume Next
    ThisWorkbook.IsAddin = False
    LpDescribeAll
    ThisWorkbook.IsAddin = True
    ThisWorkbook.Saved = True
End Sub

Public Sub LpTell(ByVal called As String, ByVal about As String, ByVal category As String, ByVal help As Variant)
    On Error Resume Next
    Application.MacroOptions Macro:="'" & ThisWorkbook.Name & "'!" & called, Description:=about, _
        Category:=category, ArgumentDescriptions:=help
End Sub
