
' Puts a text into bytes, as UTF-8 with a zero byte behind it. An unpaired surrogate becomes the replacement character.
Public Sub HenceBytes(ByVal text As String, bytes() As Byte)
    Dim used As Long, i As Long, code As Long, low As Long
    ReDim bytes(0 To 3 * Len(text))
    i = 1
    Do While i <= Len(text)
        code = AscW(Mid$(text, i, 1)) And &HFFFF&
        i = i + 1
        If code >= &HD800& And code <= &HDFFF& Then
            low = 0
            If code < &HDC00& And i <= Len(text) Then low = AscW(Mid$(text, i, 1)) And &HFFFF&
            If low >= &HDC00& And low <= &HDFFF& Then
                code = &H10000 + (code - &HD800&) * &H400& + (low - &HDC00&)
                i = i + 1
            Else
                code = &HFFFD&
            End If
        End If
        If code < &H80& Then
            bytes(used) = code
            used = used + 1
        ElseIf code < &H800& Then
            bytes(used) = &HC0& Or (code \ &H40&)
            bytes(used + 1) = &H80& Or (code And &H3F&)
            used = used + 2
        ElseIf code < &H10000 Then
            bytes(used) = &HE0& Or (code \ &H1000&)
            bytes(used + 1) = &H80& Or ((code \ &H40&) And &H3F&)
            bytes(used + 2) = &H80& Or (code And &H3F&)
            used = used + 3
        Else
            bytes(used) = &HF0& Or (code \ &H40000)
            bytes(used + 1) = &H80& Or ((code \ &H1000&) And &H3F&)
            bytes(used + 2) = &H80& Or ((code \ &H40&) And &H3F&)
            bytes(used + 3) = &H80& Or (code And &H3F&)
            used = used + 4
        End If
    Loop
    bytes(used) = 0
    ReDim Preserve bytes(0 To used)
End Sub

' The text in UTF-8 that the library wrote, up to its zero byte.
Public Function HenceText(bytes() As Byte) As String
    Dim text As String, i As Long, code As Long, more As Long
    i = LBound(bytes)
    Do While i <= UBound(bytes)
        code = bytes(i)
        i = i + 1
        If code = 0 Then Exit Do
        more = 0
        If code >= &HF0& Then
            code = code And &H7&
            more = 3
        ElseIf code >= &HE0& Then
            code = code And &HF&
            more = 2
        ElseIf code >= &HC0& Then
            code = code And &H1F&
            more = 1
        End If
        Do While more > 0 And i <= UBound(bytes)
            code = code * &H40& + (bytes(i) And &H3F&)
            i = i + 1
            more = more - 1
        Loop
        If code >= &H10000 Then
            text = text & ChrW(&HD800& + (code - &H10000) \ &H400&) & ChrW(&HDC00& + (code And &H3FF&))
        Else
            text = text & ChrW(code)
        End If
    Loop
    HenceText = text
End Function
