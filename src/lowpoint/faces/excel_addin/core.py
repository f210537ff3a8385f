"""The two modules of VBA that are written by hand: calls to Python and their answers, and the link to Python itself."""

from __future__ import annotations

from lowpoint.faces.excel_addin.outline import MODULE

__all__ = ["CORE", "OPENING", "link"]

CORE = f"""Option Explicit
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
    LpSent = Server.CallUDF("{MODULE}", (called), sent, Empty, Empty)
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
"""

OPENING = """Private Sub Workbook_Open()
    LpDescribe
End Sub
"""
"""Goes into the module of the workbook itself."""

_LINK = """Option Explicit
Option Private Module

' The link to Python. What it starts is fixed when the add-in is built: no book and no file beside it has a say.

#If Win64 Then
Private Declare PtrSafe Function LpActivate Lib "xlwings64-<xlwings>.dll" Alias "XLPyDLLActivateAuto" _
    (ByRef result As Variant, Optional ByVal command As String = "", Optional ByVal mode As Long = 1) As Long
#Else
Private Declare PtrSafe Function LpActivate Lib "xlwings32-<xlwings>.dll" Alias "XLPyDLLActivateAuto" _
    (ByRef result As Variant, Optional ByVal command As String = "", Optional ByVal mode As Long = 1) As Long
#End If
Private Declare PtrSafe Function LpLoad Lib "kernel32" Alias "LoadLibraryW" (ByVal path As LongPtr) As LongPtr

Public Function LpServer() As Object
    Dim result As Variant
    LpLoadLibrary
    If LpActivate(result, LpCommand, 1) <> 0 Then Err.Raise 5, , CStr(result)
    Set LpServer = result
End Function

' The library of xlwings lies beside Python, or one folder up in an environment of its own.
Private Sub LpLoadLibrary()
    Dim folder As String
    folder = LpFolder(LpPython)
    If LpLoad(StrPtr(folder & LpLibrary)) <> 0 Then Exit Sub
    If LpLoad(StrPtr(LpFolder(Left$(folder, Len(folder) - 1)) & LpLibrary)) <> 0 Then Exit Sub
    Err.Raise 5, , LpLibrary & " of xlwings is not beside " & LpPython & ". Run 'lowpoint excel install' again."
End Sub

Private Function LpLibrary() As String
#If Win64 Then
    LpLibrary = "xlwings64-<xlwings>.dll"
#Else
    LpLibrary = "xlwings32-<xlwings>.dll"
#End If
End Function

Private Function LpFolder(ByVal path As String) As String
    LpFolder = Left$(path, InStrRev(path, "\\"))
End Function

' -P: modules are not looked for in the folder that Excel happens to be in.
Private Function LpCommand() As String
    LpCommand = Chr$(34) & LpPython & Chr$(34) & " -P -B -c " & Chr$(34) _
        & "import xlwings; xlwings.serve('$(CLSID)')" & Chr$(34)
End Function

Private Function LpPython() As String
    LpPython = <python>
End Function

Public Function LpMaker() As String
    LpMaker = "<maker>"
End Function
"""


def link(python: str, xlwings: str, maker: str) -> str:
    """The module that knows this machine: the path of Python, the version of xlwings, what made the add-in."""
    return _LINK.replace("<xlwings>", xlwings).replace("<maker>", maker).replace("<python>", _text(python))


def _text(text: str) -> str:
    """A text as an expression of VBA; what is outside ASCII by its number, for modules have a code page."""
    parts, plain = [], ""
    for sign in text:
        if sign.isascii() and sign.isprintable():
            plain += sign
            continue
        parts += [_quoted(plain)] if plain else []
        parts += [f"ChrW$({unit})" for unit in _units(sign)]
        plain = ""
    return " & ".join([*parts, _quoted(plain)] if plain or not parts else parts)


def _units(sign: str) -> list[int]:
    data = sign.encode("utf-16-le")
    return [int.from_bytes(data[place : place + 2], "little") for place in range(0, len(data), 2)]


def _quoted(text: str) -> str:
    return '"' + text.replace('"', '""') + '"'
