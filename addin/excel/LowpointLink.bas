Option Explicit
Option Private Module

' The link to Python. What it starts is fixed when the add-in is built: no book and no file beside it has a say.

#If Win64 Then
Private Declare PtrSafe Function LpActivate Lib "xlwings64-0.37.8.dll" Alias "XLPyDLLActivateAuto" _
    (ByRef result As Variant, Optional ByVal command As String = "", Optional ByVal mode As Long = 1) As Long
#Else
Private Declare PtrSafe Function LpActivate Lib "xlwings32-0.37.8.dll" Alias "XLPyDLLActivateAuto" _
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
    LpLibrary = "xlwings64-0.37.8.dll"
#Else
    LpLibrary = "xlwings32-0.37.8.dll"
#End If
End Function

Private Function LpFolder(ByVal path As String) As String
    LpFolder = Left$(path, InStrRev(path, "\"))
End Function

' -P: modules are not looked for in the folder that Excel happens to be in.
Private Function LpCommand() As String
    LpCommand = Chr$(34) & LpPython & Chr$(34) & " -P -B -c " & Chr$(34) _
        & "import xlwings; xlwings.serve('$(CLSID)')" & Chr$(34)
End Function

Private Function LpPython() As String
    LpPython = "C:\path\to\python.exe"
End Function

Public Function LpMaker() As String
    LpMaker = "0.1.0 d02360d484eaea06"
End Function
