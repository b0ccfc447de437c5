// hence for C#: classes and exceptions over the C functions of Native.cs. To be copied and extended.

using System;
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
            offsets, flows, Native.Size(flows), lowest, highest, rates, Native.Size(rates), out count, ref error),
            error);
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

    private delegate int EachFunction(
        Handle basis, double[] offsets, UIntPtr n, double[] result, ref Native.Error error);

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
