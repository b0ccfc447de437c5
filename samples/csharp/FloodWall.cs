// Values a flood wall over a hundred years, calling hence from C#. The town of Wrenmouth is invented.
//
// From the root of the repository, with Mono:
//
//     cargo build --release -p hence-ffi
//     mcs -out:target/flood_wall_cs.exe samples/csharp/*.cs
//     LD_LIBRARY_PATH=target/release mono target/flood_wall_cs.exe
//
// Another rate line or schedule and another timing may follow: "3.5% to 30, 3% after" "flows end".

using System;
using System.Globalization;
using System.IO;
using System.Text;

public static class FloodWall
{
    private static readonly string[] Names = { "building", "upkeep", "avoided damage" };

    // C# reads and writes numbers as the system's language has it unless told, with a decimal comma in places.
    private static readonly CultureInfo Plain = CultureInfo.InvariantCulture;

    // The bits stand beside each number, so that two runs can be compared to the last one.
    private static void Show(string what, double x)
    {
        var bits = BitConverter.DoubleToInt64Bits(x);
        Console.WriteLine(string.Format(Plain, "{0,-34}{1,14:F6}  {2:x16}", what, x, bits));
    }

    private static void ValueTheWall(string curve, string timing)
    {
        // The file has a column a stream; the library takes a stream a row, the rows one after the other.
        var lines = File.ReadAllLines("samples/flood-wall.csv");
        var n = lines.Length - 1;
        var years = new double[n];
        var flows = new double[Names.Length * n];
        for (var i = 0; i < n; i++)
        {
            var cells = lines[i + 1].Split(',');
            years[i] = double.Parse(cells[0], Plain);
            for (var s = 0; s < Names.Length; s++) flows[s * n + i] = double.Parse(cells[s + 1], Plain);
        }

        // The timing is part of the basis, so that the printed line says all that repeats the values.
        using (var basis = new Basis(curve + "; " + timing))
        {
            Console.WriteLine("basis: " + basis.Line);
            Console.WriteLine("in words: " + basis.Words);

            // The first year of the file is the base: its flows stand half a year before the year's end.
            var offsets = Hence.OffsetsFromYears(years, years[0], timing);
            var factors = basis.Factors(offsets);
            var rates = basis.ForwardRates(offsets);
            for (var i = 0; i < n; i += 25)
            {
                Show("offset in " + (int)years[i], offsets[i]);
                Show("factor in " + (int)years[i], factors[i]);
                Show("forward rate in " + (int)years[i], rates[i]);
            }

            var values = basis.PresentValues(offsets, flows);
            for (var s = 0; s < Names.Length; s++) Show("present value of " + Names[s], values[s]);
            var net = new double[n];
            for (var i = 0; i < n; i++) net[i] = flows[i] + flows[n + i] + flows[2 * n + i];
            var npv = basis.PresentValues(offsets, net)[0];
            Show("net present value", npv);
            Show("the same every year", basis.AnnualEquivalent(npv, n - 1));

            // The wall is rebuilt in the last year: flows that change their sign twice can have two rates of return.
            foreach (var rate in Hence.IrrAll(offsets, net)) Show("internal rate of return", rate);

            Show("Ramsey rate", Hence.RamseyRate(0.015, 1.0, 0.02));
            Show("equity weight of the harbour side", Hence.EquityWeight(21400, 34250, 1.3));

            // A gap in the data is refused, never valued as something; the index says where it is.
            flows[n + 24] = double.NaN;
            try
            {
                basis.PresentValues(offsets, flows);
            }
            catch (HenceException e)
            {
                Console.WriteLine("refused: " + e.Message + " (argument " + e.Argument + ", index " + e.Index + ")");
                Console.WriteLine("which is " + Names[e.Index / n] + " in " + (int)years[e.Index % n]);
            }
        }
    }

    public static int Main(string[] arguments)
    {
        Console.OutputEncoding = new UTF8Encoding(false);
        var curve = arguments.Length > 0 ? arguments[0] : "uk-2003";
        var timing = arguments.Length > 1 ? arguments[1] : "flows middle";
        try
        {
            ValueTheWall(curve, timing);
            return 0;
        }
        catch (HenceException e)
        {
            Console.Error.WriteLine(e.Message + " (argument " + e.Argument + ", index " + e.Index + ")");
            return 1;
        }
    }
}
