import static java.nio.charset.StandardCharsets.UTF_8;

/** What the library refused: its status, the argument of the C function (from 1), and the index within it (or -1). */
public final class HenceException extends RuntimeException {
    private static final long serialVersionUID = 1;

    public final String status;
    public final int argument;
    public final long index;

    /** Made by hence_jni.c, whose texts are bytes. */
    HenceException(String status, byte[] message, int argument, long index) {
        super(status + ": " + new String(message, UTF_8));
        this.status = status;
        this.argument = argument;
        this.index = index;
    }
}
