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
' Yearly compounding: a year of waiting divides by 1 + rate.
Public Const HENCE_COMPOUNDING_YEARLY As Long = 0
' Continuous compounding: a year of waiting multiplies by exp(-rate).
Public Const HENCE_COMPOUNDING_CONTINUOUS As Long = 1
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
' A flat yearly rate in place of the basis.
Public Const HENCE_PARAMETER_RATE As Long = 0
' Pure time preference of a basis that states it.
Public Const HENCE_PARAMETER_PREFERENCE As Long = 1
' Elasticity of marginal utility of a basis that states it.
Public Const HENCE_PARAMETER_ELASTICITY As Long = 2
' Growth of a basis that states it; of a path that of its first band, the others moving along.
Public Const HENCE_PARAMETER_GROWTH As Long = 3

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

' How values, one a draw, are spread, written into the caller's own struct.
Public Type hence_spread
    struct_size As Long
    padding_1 As Long
    mean As Double
    mean_error As Double
    sd As Double
    lowest As Double
    highest As Double
    positive As Double
    positive_error As Double
End Type

' What a series of consumption says of its growth, written into the caller's own struct. Every rate is a
' fraction per year; standard errors bear the name of their figure.
Public Type hence_growth
    struct_size As Long
    has_persistence As Long
    trend As Double
    trend_error As Double
    mean As Double
    mean_error As Double
    trend_growth As Double
    mean_growth As Double
    sd As Double
    sd_error As Double
    persistence As Double
    persistence_error As Double
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

' Mean yearly rates to the offsets: D(t)^(-1/t) - 1, at 0 its limit, fractions per year. With continuous
' compounding the mean rate is ln(1 + this).
Public Declare PtrSafe Function hence_mean_rates Lib "hence64.xll" ( _
    ByVal basis As LongPtr, _
    ByRef offsets As Double, _
    ByVal n As LongPtr, _
    ByRef rates As Double, _
    ByRef failure As hence_error) As Long

' Instantaneous rates at the offsets: -D'(t)/D(t), fractions per year with continuous compounding; at an edge
' that of the earlier band.
Public Declare PtrSafe Function hence_instantaneous_rates Lib "hence64.xll" ( _
    ByVal basis As LongPtr, _
    ByRef offsets As Double, _
    ByVal n As LongPtr, _
    ByRef rates As Double, _
    ByRef failure As hence_error) As Long

' Net present values of options under seeded draws of the discount rate: in each draw one flat yearly rate,
' preference + hazard + elasticity x growth, each part drawn from its own distribution.
Public Declare PtrSafe Function hence_draws_value Lib "hence64.xll" ( _
    ByVal preference As LongPtr, _
    ByVal hazard As LongPtr, _
    ByVal elasticity As LongPtr, _
    ByVal growth As LongPtr, _
    ByRef offsets As Double, _
    ByRef flows As Double, _
    ByVal rows As LongPtr, _
    ByVal n As LongPtr, _
    ByVal count As LongPtr, _
    ByVal seed As LongLong, _
    ByVal threads As Long, _
    ByRef rates As Double, _
    ByRef values As Double, _
    ByRef failure As hence_error) As Long

' Percentiles, mean, standard deviation and the share above 0 of values, one a draw.
Public Declare PtrSafe Function hence_draws_spread Lib "hence64.xll" ( _
    ByRef values As Double, _
    ByVal n As LongPtr, _
    ByRef percentiles As Double, _
    ByVal count As LongPtr, _
    ByRef found As Double, _
    ByRef spread As hence_spread, _
    ByRef failure As hence_error) As Long

' How probable it is that each option ranks first: the share of draws in which its value is above every
' other's.
Public Declare PtrSafe Function hence_draws_rank Lib "hence64.xll" ( _
    ByRef values As Double, _
    ByVal rows As LongPtr, _
    ByVal count As LongPtr, _
    ByRef alone As Double, _
    ByRef tied As Double, _
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

' The elasticity of marginal utility that several brackets of a tax schedule imply: the mean of what each
' implies by equal absolute sacrifice, as for hence_elasticity_from_taxes, weighted by taxpayers; a pure
' number.
Public Declare PtrSafe Function hence_elasticity_from_brackets Lib "hence64.xll" ( _
    ByRef marginal As Double, _
    ByRef average As Double, _
    ByRef weights As Double, _
    ByVal n As LongPtr, _
    ByRef elasticity As Double, _
    ByRef failure As hence_error) As Long

' The hazard, a fraction per year, of a yearly probability p that benefits end for good: p/(1 - p) with
' yearly compounding, -ln(1 - p) with continuous.
Public Declare PtrSafe Function hence_hazard_from_probability Lib "hence64.xll" ( _
    ByVal probability As Double, _
    ByVal compounding As Long, _
    ByRef hazard As Double, _
    ByRef failure As hence_error) As Long

' The hazard, a fraction per year, of an expected waiting time until benefits end for good: 1/(years - 1)
' with yearly compounding, 1/years with continuous.
Public Declare PtrSafe Function hence_hazard_from_waiting_time Lib "hence64.xll" ( _
    ByVal years As Double, _
    ByVal compounding As Long, _
    ByRef hazard As Double, _
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

' Estimates growth of consumption from a series: trend, mean, standard deviation and persistence.
Public Declare PtrSafe Function hence_growth_estimate Lib "hence64.xll" ( _
    ByRef consumption As Double, _
    ByRef years As Long, _
    ByVal n As LongPtr, _
    ByRef growth As hence_growth, _
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

' Every value of a parameter of the basis, rising, at which the net present value is zero, all else as it is.
' For two options to swap, give the flows of one less those of the other.
Public Declare PtrSafe Function hence_switching_values Lib "hence64.xll" ( _
    ByVal basis As LongPtr, _
    ByVal parameter As Long, _
    ByRef offsets As Double, _
    ByRef flows As Double, _
    ByVal n As LongPtr, _
    ByVal lowest As Double, _
    ByVal highest As Double, _
    ByRef values As Double, _
    ByVal capacity As LongPtr, _
    ByRef count As LongPtr, _
    ByRef failure As hence_error) As Long

' The multiple of one stream at which the net present value is zero: 1 - net/stream; 1 is the stream as it
' is.
Public Declare PtrSafe Function hence_switching_multiplier Lib "hence64.xll" ( _
    ByVal net As Double, _
    ByVal stream As Double, _
    ByRef multiplier As Double, _
    ByRef failure As hence_error) As Long

' The utility of a consumption: (c^(1-eta) - 1)/(1 - eta), and ln c at an elasticity eta of 1.
Public Declare PtrSafe Function hence_utility Lib "hence64.xll" ( _
    ByVal consumption As Double, _
    ByVal elasticity As Double, _
    ByRef utility As Double, _
    ByRef failure As hence_error) As Long

' The utility of one more unit of consumption: c^-eta.
Public Declare PtrSafe Function hence_marginal_utility Lib "hence64.xll" ( _
    ByVal consumption As Double, _
    ByVal elasticity As Double, _
    ByRef utility As Double, _
    ByRef failure As hence_error) As Long

' The welfare of a path of consumption: the sum of utilities over (1 + rho)^offset with yearly compounding,
' times exp(-rho offset) with continuous. Only which of two paths is better, and ratios of differences, have
' a meaning.
Public Declare PtrSafe Function hence_welfare Lib "hence64.xll" ( _
    ByRef consumption As Double, _
    ByRef offsets As Double, _
    ByVal n As LongPtr, _
    ByVal rho As Double, _
    ByVal elasticity As Double, _
    ByVal compounding As Long, _
    ByRef welfare As Double, _
    ByRef failure As hence_error) As Long

' The discount factors along a path of consumption, what one small unit at each date is worth at the base:
' (base/c)^eta over (1 + rho)^offset with yearly compounding, times exp(-rho offset) with continuous.
Public Declare PtrSafe Function hence_welfare_factors Lib "hence64.xll" ( _
    ByRef consumption As Double, _
    ByRef offsets As Double, _
    ByVal n As LongPtr, _
    ByVal origin As Double, _
    ByVal rho As Double, _
    ByVal elasticity As Double, _
    ByVal compounding As Long, _
    ByRef factors As Double, _
    ByRef failure As hence_error) As Long

' What must be received later so that giving up an amount now leaves welfare as it was. For small amounts the
' rate of return between the two is the Ramsey rate.
Public Declare PtrSafe Function hence_compensation Lib "hence64.xll" ( _
    ByVal amount As Double, _
    ByVal now As Double, _
    ByVal later As Double, _
    ByVal years As Double, _
    ByVal rho As Double, _
    ByVal elasticity As Double, _
    ByVal compounding As Long, _
    ByRef received As Double, _
    ByRef failure As hence_error) As Long

' The exact value of flows that are not small against consumption: the amount at the base, without the
' project, that changes welfare as much as they do (equivalent variation). The sum of factor x flow is its
' limit for small flows.
Public Declare PtrSafe Function hence_equivalent_variation Lib "hence64.xll" ( _
    ByRef flows As Double, _
    ByRef consumption As Double, _
    ByRef factors As Double, _
    ByVal n As LongPtr, _
    ByVal origin As Double, _
    ByVal elasticity As Double, _
    ByRef value As Double, _
    ByRef failure As hence_error) As Long

' The most that could be paid at the base for flows that are not small against consumption: the amount which,
' taken from those who have the project, leaves them as well off as without it (compensating variation);
' negative for what must be received. Not above hence_equivalent_variation.
Public Declare PtrSafe Function hence_compensating_variation Lib "hence64.xll" ( _
    ByRef flows As Double, _
    ByRef consumption As Double, _
    ByRef factors As Double, _
    ByVal n As LongPtr, _
    ByVal origin As Double, _
    ByVal base_flow As Double, _
    ByVal elasticity As Double, _
    ByRef value As Double, _
    ByRef failure As hence_error) As Long

' The consumption which, had everybody that much, would give the welfare of an unequal distribution: (sum of
' share x c^(1-eta))^(1/(1-eta)), the geometric mean at an elasticity eta of 1. Divided by the mean it is 1
' less Atkinson's index of inequality.
Public Declare PtrSafe Function hence_equally_distributed_equivalent Lib "hence64.xll" ( _
    ByRef consumption As Double, _
    ByRef shares As Double, _
    ByVal n As LongPtr, _
    ByVal elasticity As Double, _
    ByRef equivalent As Double, _
    ByRef failure As hence_error) As Long

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
