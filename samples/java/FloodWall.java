// Values a flood wall over a hundred years, calling hence from Java. The town of Wrenmouth is invented.
//
// From the root of the repository, with JAVA_HOME at a Java 17 or later:
//
//     cargo build --release -p hence-ffi
//     cc -shared -fPIC -Wall -Iinclude -I"$JAVA_HOME/include" -I"$JAVA_HOME/include/linux" samples/java/hence_jni.c -Ltarget/release -lhence -o target/libhence_jni.so
//     javac -d target/java samples/java/*.java
//     LD_LIBRARY_PATH=target/release java -Djava.library.path=target -cp target/java FloodWall
//
// Another rate line or schedule and another timing may follow: "3.5% to 30, 3% after" "flows end".

import static java.nio.charset.StandardCharsets.UTF_8;

import java.io.IOException;
import java.io.PrintStream;
import java.nio.file.Files;
import java.nio.file.Path;
import java.util.List;
import java.util.Locale;

public final class FloodWall {
    private static final String[] NAMES = {"building", "upkeep", "avoided damage"};

    // Java writes texts as the system's language has it unless told; and %f likewise, with a decimal comma in places.
    private static final PrintStream OUT = new PrintStream(System.out, true, UTF_8);
    private static final PrintStream ERR = new PrintStream(System.err, true, UTF_8);

    private static void say(String format, Object... values) {
        OUT.print(String.format(Locale.ROOT, format, values) + "\n");
    }

    /** The bits stand beside each number, so that two runs can be compared to the last one. */
    private static void show(String what, double x) {
        say("%-34s%14.6f  %016x", what, x, Double.doubleToRawLongBits(x));
    }

    private static void valueTheWall(String curve, String timing) throws IOException {
        // The file has a column a stream; the library takes a stream a row, the rows one after the other.
        List<String> lines = Files.readAllLines(Path.of("samples/flood-wall.csv"));
        int n = lines.size() - 1;
        double[] years = new double[n];
        double[] flows = new double[NAMES.length * n];
        for (int i = 0; i < n; i++) {
            String[] cells = lines.get(i + 1).split(",");
            years[i] = Double.parseDouble(cells[0]);
            for (int s = 0; s < NAMES.length; s++) {
                flows[s * n + i] = Double.parseDouble(cells[s + 1]);
            }
        }

        // The timing is part of the basis, so that the printed line says all that repeats the values.
        try (Hence.Basis basis = new Hence.Basis(curve + "; " + timing)) {
            say("basis: %s", basis.line());
            say("in words: %s", basis.words());

            // The first year of the file is the base: its flows stand half a year before the year's end.
            double[] offsets = Hence.offsetsFromYears(years, years[0], timing);
            double[] factors = basis.factors(offsets);
            double[] rates = basis.forwardRates(offsets);
            for (int i = 0; i < n; i += 25) {
                show("offset in " + (int) years[i], offsets[i]);
                show("factor in " + (int) years[i], factors[i]);
                show("forward rate in " + (int) years[i], rates[i]);
            }

            double[] values = basis.presentValues(offsets, flows);
            for (int s = 0; s < NAMES.length; s++) {
                show("present value of " + NAMES[s], values[s]);
            }
            double[] net = new double[n];
            for (int i = 0; i < n; i++) {
                net[i] = flows[i] + flows[n + i] + flows[2 * n + i];
            }
            double npv = basis.presentValues(offsets, net)[0];
            show("net present value", npv);
            show("the same every year", basis.annualEquivalent(npv, n - 1));

            // The wall is rebuilt in the last year: flows that change their sign twice can have two rates of return.
            for (double rate : Hence.irrAll(offsets, net, -0.5, 1.0)) {
                show("internal rate of return", rate);
            }

            show("Ramsey rate", Hence.ramseyRate(0.015, 1.0, 0.02));
            show("equity weight of the harbour side", Hence.equityWeight(21400, 34250, 1.3));

            // A gap in the data is refused, never valued as something; the index says where it is.
            flows[n + 24] = Double.NaN;
            try {
                basis.presentValues(offsets, flows);
            } catch (HenceException e) {
                say("refused: %s (argument %d, index %d)", e.getMessage(), e.argument, e.index);
                say("which is %s in %d", NAMES[(int) e.index / n], (int) years[(int) e.index % n]);
            }
        }
    }

    public static void main(String[] arguments) throws IOException {
        String curve = arguments.length > 0 ? arguments[0] : "uk-2003";
        String timing = arguments.length > 1 ? arguments[1] : "flows middle";
        try {
            valueTheWall(curve, timing);
        } catch (HenceException e) {
            ERR.printf("%s (argument %d, index %d)%n", e.getMessage(), e.argument, e.index);
            System.exit(1);
        }
    }
}
