Private Sub Workbook_Open()
    LpDescribe
End Sub
