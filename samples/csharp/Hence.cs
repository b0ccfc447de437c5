// hence for C#: the C functions by P/Invoke. To be copied and extended.
//
// An array of doubles has the same layout in C#, so the runtime pins it and passes its address: nothing is copied.

using System;
using System.Runtime.InteropServices;
using System.Text;
using Microsoft.Win32.SafeHandles;

/// <summary>What the library refused: its status, the argument (from 1), and the index within it (or -1).</summary>
public sealed class HenceException : Exception
{
    public int Code { get; }
    public int Argument { get; }
    public long Index { get; }

    internal HenceException(string message, int code, int argument, long index) : base(message)
    {
        Code = code;
        Argument = argument;
        Index = index;
    }
}

/// <summary>The functions that need no basis.</summary>
public static class Hence
{
    public static double[] OffsetsFromYears(double[] years, double start, string timing)
    {
        var offsets = new double[years.Length];
        var error = Native.NewError();
        Native.Check(Native.hence_offsets_from_years(
            years, Native.Size(years), start, Native.Utf8(timing), offsets, ref error), error);
        return offsets;
    }

    /// <summary>Every internal rate of return between two rates; there cannot be more than flows.</summary>
    public static double[] IrrAll(double[] offsets, double[] flows, double lowest = -0.5, double highest = 1.0)
    {
        if (offsets.Length != flows.Length) throw new ArgumentException("offsets and flows differ in length");
        var rates = new double[flows.Length];
        var error = Native.NewError();
        UIntPtr count;
        Native.Check(Native.hence_irr_all(
            offsets, flows, Native.Size(flows), lowest, highest, rates, Native.Size(rates), out count, ref error), error);
        Array.Resize(ref rates, (int)count);
        return rates;
    }

    public static double RamseyRate(double rho, double eta, double g)
    {
        var error = Native.NewError();
        double rate;
        Native.Check(Native.hence_ramsey_rate(rho, eta, g, out rate, ref error), error);
        return rate;
    }

    public static double EquityWeight(double income, double reference, double elasticity)
    {
        var error = Native.NewError();
        double weight;
        Native.Check(Native.hence_equity_weight(income, reference, elasticity, out weight, ref error), error);
        return weight;
    }
}

/// <summary>A parsed rate line or schedule, freed by Dispose or, late, by the collector.</summary>
public sealed class Basis : IDisposable
{
    private readonly Handle handle;

    public Basis(string line)
    {
        if (Native.hence_abi_version() != Native.AbiVersion)
            throw new DllNotFoundException("the library is not the one that these declarations are of");
        var error = Native.NewError();
        Native.Check(Native.hence_basis_parse(Native.Utf8(line), out handle, ref error), error);
    }

    public void Dispose() => handle.Dispose();

    /// <summary>The line that parses back to the same basis.</summary>
    public string Line => Text(Native.hence_basis_line);

    /// <summary>The basis in words, with its source.</summary>
    public string Words => Text(Native.hence_basis_describe);

    public double[] Factors(double[] offsets) => Each(Native.hence_factors, offsets);

    public double[] ForwardRates(double[] offsets) => Each(Native.hence_forward_rates, offsets);

    /// <summary>Flows row-major, a stream a row of as many flows as there are offsets; a value a row.</summary>
    public double[] PresentValues(double[] offsets, double[] flows)
    {
        if (offsets.Length == 0 || flows.Length % offsets.Length != 0)
            throw new ArgumentException("the flows are not whole rows");
        var values = new double[flows.Length / offsets.Length];
        var error = Native.NewError();
        Native.Check(Native.hence_present_values(
            handle, offsets, flows, Native.Size(values), Native.Size(offsets), values, ref error), error);
        return values;
    }

    public double AnnualEquivalent(double value, int serviceYears)
    {
        var error = Native.NewError();
        double annual;
        Native.Check(Native.hence_annual_equivalent(handle, value, serviceYears, out annual, ref error), error);
        return annual;
    }

    private delegate int EachFunction(Handle basis, double[] offsets, UIntPtr n, double[] result, ref Native.Error error);

    private double[] Each(EachFunction function, double[] offsets)
    {
        var result = new double[offsets.Length];
        var error = Native.NewError();
        Native.Check(function(handle, offsets, Native.Size(offsets), result, ref error), error);
        return result;
    }

    private delegate int TextFunction(Handle basis, byte[] buffer, UIntPtr capacity, ref Native.Error error);

    // Asked with no room at all, the library says how many bytes a text needs.
    private string Text(TextFunction function)
    {
        var error = Native.NewError();
        var status = function(handle, null, UIntPtr.Zero, ref error);
        if (status != Native.ErrCapacity) Native.Check(status, error);
        var buffer = new byte[error.Index];
        Native.Check(function(handle, buffer, (UIntPtr)buffer.Length, ref error), error);
        return Encoding.UTF8.GetString(buffer, 0, buffer.Length - 1);
    }

    /// <summary>Frees the handle once, also where the program forgets to.</summary>
    internal sealed class Handle : SafeHandleZeroOrMinusOneIsInvalid
    {
        public Handle() : base(true) { }

        protected override bool ReleaseHandle()
        {
            Native.hence_basis_free(handle);
            return true;
        }
    }
}

/// <summary>The declarations of hence.h.</summary>
internal static class Native
{
    internal const uint AbiVersion = 1;
    internal const int Ok = 0, ErrCapacity = 14;

    [StructLayout(LayoutKind.Sequential)]
    internal struct Error
    {
        public uint StructSize;
        public int Code;
        public int Argument;
        public long Index;
        [MarshalAs(UnmanagedType.ByValArray, SizeConst = 256)] public byte[] Message;
    }

    internal static Error NewError() =>
        new Error { StructSize = (uint)Marshal.SizeOf(typeof(Error)), Message = new byte[256] };

    internal static void Check(int status, Error error)
    {
        if (status == Ok) return;
        var name = Marshal.PtrToStringAnsi(hence_status_name(status));
        var message = Encoding.UTF8.GetString(error.Message, 0, Array.IndexOf(error.Message, (byte)0));
        throw new HenceException(name + ": " + message, status, error.Argument, error.Index);
    }

    internal static UIntPtr Size(double[] array) => (UIntPtr)array.Length;

    // A text as C takes it: UTF-8, ended by NUL.
    internal static byte[] Utf8(string text) => Encoding.UTF8.GetBytes(text + '\0');

    private const string Library = "hence"; // libhence.so, libhence.dylib or hence.dll, where the system looks for it
    private const CallingConvention C = CallingConvention.Cdecl;

    [DllImport(Library, CallingConvention = C)]
    internal static extern uint hence_abi_version();

    [DllImport(Library, CallingConvention = C)]
    internal static extern IntPtr hence_status_name(int code);

    [DllImport(Library, CallingConvention = C)]
    internal static extern int hence_basis_parse(byte[] line, out Basis.Handle basis, ref Error error);

    [DllImport(Library, CallingConvention = C)]
    internal static extern void hence_basis_free(IntPtr basis);

    [DllImport(Library, CallingConvention = C)]
    internal static extern int hence_basis_line(
        Basis.Handle basis, [Out] byte[] buffer, UIntPtr capacity, ref Error error);

    [DllImport(Library, CallingConvention = C)]
    internal static extern int hence_basis_describe(
        Basis.Handle basis, [Out] byte[] buffer, UIntPtr capacity, ref Error error);

    [DllImport(Library, CallingConvention = C)]
    internal static extern int hence_offsets_from_years(
        double[] years, UIntPtr n, double start, byte[] timing, [Out] double[] offsets, ref Error error);

    [DllImport(Library, CallingConvention = C)]
    internal static extern int hence_factors(
        Basis.Handle basis, double[] offsets, UIntPtr n, [Out] double[] factors, ref Error error);

    [DllImport(Library, CallingConvention = C)]
    internal static extern int hence_forward_rates(
        Basis.Handle basis, double[] offsets, UIntPtr n, [Out] double[] rates, ref Error error);

    [DllImport(Library, CallingConvention = C)]
    internal static extern int hence_present_values(
        Basis.Handle basis, double[] offsets, double[] flows, UIntPtr rows, UIntPtr n, [Out] double[] values,
        ref Error error);

    [DllImport(Library, CallingConvention = C)]
    internal static extern int hence_annual_equivalent(
        Basis.Handle basis, double value, int serviceYears, out double annual, ref Error error);

    [DllImport(Library, CallingConvention = C)]
    internal static extern int hence_irr_all(
        double[] offsets, double[] flows, UIntPtr n, double lowest, double highest, [Out] double[] rates,
        UIntPtr capacity, out UIntPtr count, ref Error error);

    [DllImport(Library, CallingConvention = C)]
    internal static extern int hence_ramsey_rate(double rho, double eta, double g, out double rate, ref Error error);

    [DllImport(Library, CallingConvention = C)]
    internal static extern int hence_equity_weight(
        double income, double reference, double elasticity, out double weight, ref Error error);
}
