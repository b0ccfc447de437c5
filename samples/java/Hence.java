import static java.nio.charset.StandardCharsets.UTF_8;

import java.util.Arrays;

/** hence for Java, over hence_jni.c: arrays are lent to the library, not copied. To be copied and extended. */
public final class Hence {
    static {
        System.loadLibrary("hence_jni");
        if (!sameVersion()) {
            throw new UnsatisfiedLinkError("the library is not the one of its header");
        }
    }

    private Hence() {}

    /** A parsed rate line or schedule, freed by close(): use it in try (...). Any number of threads may use one. */
    public static final class Basis implements AutoCloseable {
        private long handle;

        public Basis(String line) {
            handle = parse(utf8(line));
        }

        /** The line that parses back to the same basis. */
        public String line() {
            return new String(text(handle, false), UTF_8);
        }

        /** The basis in words, with its source. */
        public String words() {
            return new String(text(handle, true), UTF_8);
        }

        public double[] factors(double[] offsets) {
            double[] out = new double[offsets.length];
            each(handle, false, offsets, out);
            return out;
        }

        public double[] forwardRates(double[] offsets) {
            double[] out = new double[offsets.length];
            each(handle, true, offsets, out);
            return out;
        }

        /** Flows row-major, a stream a row of as many flows as there are offsets; a value a row. */
        public double[] presentValues(double[] offsets, double[] flows) {
            if (offsets.length == 0 || flows.length % offsets.length != 0) {
                throw new IllegalArgumentException("the flows are not whole rows");
            }
            double[] out = new double[flows.length / offsets.length];
            values(handle, offsets, flows, out);
            return out;
        }

        public double annualEquivalent(double value, int serviceYears) {
            return annual(handle, value, serviceYears);
        }

        @Override
        public void close() {
            free(handle);
            handle = 0; // a call after this is refused by the library
        }
    }

    public static double[] offsetsFromYears(double[] years, double base, String timing) {
        double[] out = new double[years.length];
        offsets(years, base, utf8(timing), out);
        return out;
    }

    /** Every internal rate of return between two rates; there cannot be more than flows. */
    public static double[] irrAll(double[] offsets, double[] flows, double lowest, double highest) {
        if (offsets.length != flows.length) {
            throw new IllegalArgumentException("offsets and flows differ in length");
        }
        double[] out = new double[flows.length];
        return Arrays.copyOf(out, rates(offsets, flows, lowest, highest, out));
    }

    public static native double ramseyRate(double rho, double eta, double g);

    public static native double equityWeight(double income, double reference, double elasticity);

    /** A text as C takes it: UTF-8, ended by NUL. */
    private static byte[] utf8(String text) {
        return (text + '\0').getBytes(UTF_8);
    }

    private static native boolean sameVersion();

    private static native long parse(byte[] line);

    private static native void free(long basis);

    private static native byte[] text(long basis, boolean words);

    private static native void each(long basis, boolean rates, double[] offsets, double[] out);

    private static native void offsets(double[] years, double base, byte[] timing, double[] out);

    private static native void values(long basis, double[] offsets, double[] flows, double[] out);

    private static native double annual(long basis, double value, int serviceYears);

    private static native int rates(double[] offsets, double[] flows, double lowest, double highest, double[] out);
}
