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

' The version of the binary interface: raised when a function, struct or constant changes its meaning.
Public Const HENCE_ABI_VERSION As Long = 1
' A cell holds a number; a date is its serial number, day 0 being 30 December 1899.
Public Const HENCE_CELL_NUMBER As Long = 0
' A cell holds a text.
Public Const HENCE_CELL_TEXT As Long = 1
' A cell is blank.
Public Const HENCE_CELL_BLANK As Long = 2
' A cell holds TRUE (number 1) or FALSE (number 0).
Public Const HENCE_CELL_LOGICAL As Long = 3
' A cell holds an error value; its number is that of ERROR.TYPE: 1 #NULL!, 2 #DIV/0!, 3 #VALUE!, 4 #REF!, 5
' #NAME?, 6 #NUM!, 7 #N/A.
Public Const HENCE_CELL_ERROR As Long = 4
' The longest array accepted, in elements.
Public Const HENCE_LENGTH_MAX As Long = 1073741824
' Done.
Public Const HENCE_OK As Long = 0
' A required pointer is NULL, or an array is NULL with a length above 0.
Public Const HENCE_ERR_NULL As Long = 10
' A pointer is not aligned for its type.
Public Const HENCE_ERR_ALIGNMENT As Long = 11
' A length is above HENCE_LENGTH_MAX, or there is no memory for as many results.
Public Const HENCE_ERR_LENGTH As Long = 12
' An output overlaps an input or another output.
Public Const HENCE_ERR_OVERLAP As Long = 13
' The caller's buffer is too small.
Public Const HENCE_ERR_CAPACITY As Long = 14
' A text is not UTF-8.
Public Const HENCE_ERR_UTF8 As Long = 15
' An input is NaN or infinite, or the result would be.
Public Const HENCE_ERR_NOT_FINITE As Long = 20
' A rate or parameter is outside its range.
Public Const HENCE_ERR_RANGE As Long = 21
' An offset is outside the curve's domain.
Public Const HENCE_ERR_DOMAIN As Long = 22
' Arrays differ in length or are empty.
Public Const HENCE_ERR_SHAPE As Long = 23
' A sum does not converge, or the quantity has no meaning for these inputs.
Public Const HENCE_ERR_NO_MEANING As Long = 24
' A text does not follow its grammar.
Public Const HENCE_ERR_SYNTAX As Long = 30
' No schedule of that id is known.
Public Const HENCE_ERR_SCHEDULE As Long = 31
' The curve needs a base year or a length that was not given.
Public Const HENCE_ERR_CONTEXT As Long = 32
' This version does not offer what was asked.
Public Const HENCE_ERR_UNSUPPORTED As Long = 33
' A fault inside the library; nothing was written.
Public Const HENCE_ERR_INTERNAL As Long = 90

' A range of cells that a caller hands over, row by row. One value is a range of one cell.
Public Type hence_range
    struct_size As Long
    padding_1 As Long
    rows As LongPtr
    columns As LongPtr
    numbers As LongPtr
    kinds As LongPtr
    texts As LongPtr
End Type

' What went wrong, written into the caller's own struct, which may overlap no other argument. Nothing in it
' is allocated or freed.
Public Type hence_error
    struct_size As Long
    code As Long
    argument As Long
    padding_1 As Long
    index As LongLong
    message(0 To 255) As Byte
End Type

' The version of the binary interface that this library was built with.
Public Declare PtrSafe Function hence_abi_version_of_library Lib "hence64.xll" Alias "hence_abi_version" ( _
    ) As Long

' Calls a worksheet function, as the add-ins do.
Public Declare PtrSafe Function hence_worksheet_call Lib "hence64.xll" ( _
    ByVal function_name As LongPtr, _
    ByRef arguments As LongPtr, _
    ByVal n As LongPtr, _
    ByRef out As LongPtr, _
    ByRef failure As hence_error) As Long

' Frees an answer. NULL is allowed. Threads: no other thread may be using it.
Public Declare PtrSafe Sub hence_answer_free Lib "hence64.xll" (ByVal answer As LongPtr)

' The numbers of rows and columns of an answer.
Public Declare PtrSafe Function hence_answer_shape Lib "hence64.xll" ( _
    ByVal answer As LongPtr, _
    ByRef rows As LongPtr, _
    ByRef columns As LongPtr, _
    ByRef failure As hence_error) As Long

' The cells of an answer, row by row.
Public Declare PtrSafe Function hence_answer_cells Lib "hence64.xll" ( _
    ByVal answer As LongPtr, _
    ByRef numbers As Double, _
    ByRef kinds As Byte, _
    ByVal n As LongPtr, _
    ByRef failure As hence_error) As Long

' The text of a cell of an answer; empty where it holds no text.
Public Declare PtrSafe Function hence_answer_text Lib "hence64.xll" ( _
    ByVal answer As LongPtr, _
    ByVal cell As LongPtr, _
    ByVal buffer As LongPtr, _
    ByVal capacity As LongPtr, _
    ByRef failure As hence_error) As Long

' Parses a rate line, a rate as text, or the id of a built-in schedule.
Public Declare PtrSafe Function hence_basis_parse Lib "hence64.xll" ( _
    ByVal line As LongPtr, _
    ByRef out As LongPtr, _
    ByRef failure As hence_error) As Long

' Parses a basis whose curve needs a base year or the appraisal's length.
Public Declare PtrSafe Function hence_basis_parse_at Lib "hence64.xll" ( _
    ByVal line As LongPtr, _
    ByVal base_year As Long, _
    ByVal length As Double, _
    ByRef out As LongPtr, _
    ByRef failure As hence_error) As Long

' Frees a handle. NULL is allowed. Threads: no other thread may be using the handle.
Public Declare PtrSafe Sub hence_basis_free Lib "hence64.xll" (ByVal basis As LongPtr)

' The basis in words, with its source.
Public Declare PtrSafe Function hence_basis_describe Lib "hence64.xll" ( _
    ByVal basis As LongPtr, _
    ByVal buffer As LongPtr, _
    ByVal capacity As LongPtr, _
    ByRef failure As hence_error) As Long

' The canonical text of the basis, which parses back to the same basis: its rate line, or its schedule's id,
' with the timing that it states.
Public Declare PtrSafe Function hence_basis_line Lib "hence64.xll" ( _
    ByVal basis As LongPtr, _
    ByVal buffer As LongPtr, _
    ByVal capacity As LongPtr, _
    ByRef failure As hence_error) As Long

' The timing that the basis states, its own before its schedule's, as hence_offsets_from_years takes it:
' "flows middle, base end"; "flows end, base end" where it states none.
Public Declare PtrSafe Function hence_basis_timing Lib "hence64.xll" ( _
    ByVal basis As LongPtr, _
    ByVal buffer As LongPtr, _
    ByVal capacity As LongPtr, _
    ByRef failure As hence_error) As Long

' The rate line of a built-in schedule, with the timing it states.
Public Declare PtrSafe Function hence_schedule_line Lib "hence64.xll" ( _
    ByVal id As LongPtr, _
    ByVal buffer As LongPtr, _
    ByVal capacity As LongPtr, _
    ByRef failure As hence_error) As Long

' Offsets of flows from their years: (year - base) + position of the flows - position of the base, in years,
' the positions being start 0, middle 1/2 and end 1.
Public Declare PtrSafe Function hence_offsets_from_years Lib "hence64.xll" ( _
    ByRef years As Double, _
    ByVal n As LongPtr, _
    ByVal origin As Double, _
    ByVal timing As LongPtr, _
    ByRef offsets As Double, _
    ByRef failure As hence_error) As Long

' Offsets of dates from the base date, in years.
Public Declare PtrSafe Function hence_offsets_from_dates Lib "hence64.xll" ( _
    ByRef dates As Long, _
    ByVal n As LongPtr, _
    ByVal origin As Long, _
    ByVal day_count As LongPtr, _
    ByRef offsets As Double, _
    ByRef failure As hence_error) As Long

' Discount factors D(t), one an offset.
Public Declare PtrSafe Function hence_factors Lib "hence64.xll" ( _
    ByVal basis As LongPtr, _
    ByRef offsets As Double, _
    ByVal n As LongPtr, _
    ByRef factors As Double, _
    ByRef failure As hence_error) As Long

' Forward rates of the years that end at the offsets: D(t-1)/D(t) - 1, fractions per year.
Public Declare PtrSafe Function hence_forward_rates Lib "hence64.xll" ( _
    ByVal basis As LongPtr, _
    ByRef offsets As Double, _
    ByVal n As LongPtr, _
    ByRef rates As Double, _
    ByRef failure As hence_error) As Long

' Mean yearly rates to the offsets: D(t)^(-1/t) - 1, at 0 its limit, fractions per year.
Public Declare PtrSafe Function hence_mean_rates Lib "hence64.xll" ( _
    ByVal basis As LongPtr, _
    ByRef offsets As Double, _
    ByVal n As LongPtr, _
    ByRef rates As Double, _
    ByRef failure As hence_error) As Long

' The Ramsey rate rho + eta g, a fraction per year.
Public Declare PtrSafe Function hence_ramsey_rate Lib "hence64.xll" ( _
    ByVal rho As Double, _
    ByVal eta As Double, _
    ByVal g As Double, _
    ByRef rate As Double, _
    ByRef failure As hence_error) As Long

' The Ramsey rate where growth is uncertain and independent from year to year: rho + eta g - eta (eta + 1)
' sd^2 / 2, a fraction per year.
Public Declare PtrSafe Function hence_ramsey_rate_uncertain Lib "hence64.xll" ( _
    ByVal rho As Double, _
    ByVal eta As Double, _
    ByVal g As Double, _
    ByVal sd As Double, _
    ByRef rate As Double, _
    ByRef failure As hence_error) As Long

' The elasticity of marginal utility that tax rates imply by equal absolute sacrifice: ln(1 - marginal) /
' ln(1 - average), a pure number.
Public Declare PtrSafe Function hence_elasticity_from_taxes Lib "hence64.xll" ( _
    ByVal marginal As Double, _
    ByVal average As Double, _
    ByRef elasticity As Double, _
    ByRef failure As hence_error) As Long

' The equity weight of a group: (reference / income)^elasticity, a pure number.
Public Declare PtrSafe Function hence_equity_weight Lib "hence64.xll" ( _
    ByVal income As Double, _
    ByVal reference As Double, _
    ByVal elasticity As Double, _
    ByRef weight As Double, _
    ByRef failure As hence_error) As Long

' The real rate behind a nominal rate: (1 + nominal) / (1 + inflation) - 1, a fraction per year.
Public Declare PtrSafe Function hence_real_rate Lib "hence64.xll" ( _
    ByVal nominal As Double, _
    ByVal inflation As Double, _
    ByRef rate As Double, _
    ByRef failure As hence_error) As Long

' Present value of one stream: the sum of D(offset) x flow, correctly rounded from the factors.
Public Declare PtrSafe Function hence_present_value Lib "hence64.xll" ( _
    ByVal basis As LongPtr, _
    ByRef offsets As Double, _
    ByRef flows As Double, _
    ByVal n As LongPtr, _
    ByRef value As Double, _
    ByRef failure As hence_error) As Long

' Present values of several streams at the same offsets, one a stream, each as hence_present_value gives it.
Public Declare PtrSafe Function hence_present_values Lib "hence64.xll" ( _
    ByVal basis As LongPtr, _
    ByRef offsets As Double, _
    ByRef flows As Double, _
    ByVal rows As LongPtr, _
    ByVal n As LongPtr, _
    ByRef values As Double, _
    ByRef failure As hence_error) As Long

' The constant amount a year, over service years 1 to N, that has the present value given: value / (D(1) +
' ... + D(N)).
Public Declare PtrSafe Function hence_annual_equivalent Lib "hence64.xll" ( _
    ByVal basis As LongPtr, _
    ByVal value As Double, _
    ByVal service_years As Long, _
    ByRef annual As Double, _
    ByRef failure As hence_error) As Long

' Every internal rate of return in an interval, rising: the rates r with sum of flow x (1+r)^-offset = 0.
Public Declare PtrSafe Function hence_irr_all Lib "hence64.xll" ( _
    ByRef offsets As Double, _
    ByRef flows As Double, _
    ByVal n As LongPtr, _
    ByVal lowest As Double, _
    ByVal highest As Double, _
    ByRef rates As Double, _
    ByVal capacity As LongPtr, _
    ByRef count As LongPtr, _
    ByRef failure As hence_error) As Long

' The name of a status, as static text: "HENCE_ERR_DOMAIN". Unknown numbers give "unknown status".
Public Declare PtrSafe Function hence_status_name Lib "hence64.xll" (ByVal code As Long) As LongPtr

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
