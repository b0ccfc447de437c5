// The declarations of hence.h for C#, by P/Invoke.
//
// An array of doubles has the same layout in C#, so the runtime pins it and passes its address: nothing is copied.

using System;
using System.Runtime.InteropServices;
using System.Text;

/// <summary>The C functions, their error struct and what its texts need.</summary>
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
