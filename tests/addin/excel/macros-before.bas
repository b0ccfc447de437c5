Attribute VB_Name = "HenceLibrary"
Option Explicit
Option Private Module

' The C interface of hence for macros: discount factors, rates and present values.
'
' Made by a test from include/hence.h, which describes every function; not edited by hand. For 64-bit Excel with the
' add-in hence64.xll open: Windows then finds the library by its name.
'
' A function returns a status, HENCE_OK when it is done, and leaves its outputs untouched otherwise. Arrays are passed
' by their first element. Texts are pointers to UTF-8:
'
'     Dim basis As LongPtr, failure As hence_error, line() As Byte, offset As Double, factor As Double
'     failure.struct_size = LenB(failure)
'     HenceBytes "3.5% to 30, 3% after", line
'     If hence_basis_parse(VarPtr(line(0)), basis, failure) <> HENCE_OK Then
'         MsgBox HenceText(failure.message)
'         Exit Sub
'     End If
'     offset = 31
'     If hence_factors(basis, offset, 1, factor, failure) = HENCE_OK Then MsgBox factor
'     hence_basis_free basis

