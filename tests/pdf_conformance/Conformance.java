import java.io.BufferedReader;
import java.io.FileInputStream;
import java.io.InputStreamReader;
import java.nio.charset.StandardCharsets;
import java.util.Map;
import java.util.TreeMap;
import java.util.logging.Level;
import java.util.logging.Logger;
import org.verapdf.gf.foundry.VeraGreenfieldFoundryProvider;
import org.verapdf.pdfa.Foundries;
import org.verapdf.pdfa.flavours.PDFAFlavour;
import org.verapdf.pdfa.results.TestAssertion;
import org.verapdf.pdfa.results.ValidationResult;

/**
 * Holds PDF files against a standard, one question a line.
 *
 * In:  "3a PATH" or "ua1 PATH".
 * Out: one line for each rule that is broken, then "PASS n", "FAIL n" (n checks made)
 *      or "ERROR what".  One process answers many questions, for its first answer
 *      takes seconds and each later one a fraction of that.
 */
final class Conformance {

    private Conformance() {}

    public static void main(String[] arguments) throws Exception {
        Logger.getLogger("").setLevel(Level.OFF);
        VeraGreenfieldFoundryProvider.initialise();
        var questions = new BufferedReader(
            new InputStreamReader(System.in, StandardCharsets.UTF_8));
        for (var line = questions.readLine(); line != null; line = questions.readLine()) {
            var parts = line.split(" ", 2);
            System.out.println(answer(PDFAFlavour.fromString(parts[0]), parts[1]));
            System.out.flush();
        }
    }

    private static String answer(PDFAFlavour standard, String path) {
        var foundry = Foundries.defaultInstance();
        try (var file = new FileInputStream(path);
             var parser = foundry.createParser(file, standard)) {
            // false: passed checks are counted, not kept.
            var result = foundry.createValidator(standard, false).validate(parser);
            return broken(result)
                + (result.isCompliant() ? "PASS " : "FAIL ") + result.getTotalAssertions();
        } catch (Exception fault) {
            return "ERROR " + oneLine(fault.toString());
        }
    }

    /** One line for each rule broken, with the first place where it is. */
    private static String broken(ValidationResult result) {
        Map<String, String> rules = new TreeMap<>();
        for (var assertion : result.getTestAssertions()) {
            if (assertion.getStatus() == TestAssertion.Status.FAILED) {
                var rule = assertion.getRuleId();
                rules.putIfAbsent(
                    rule.getClause() + "-" + rule.getTestNumber(),
                    oneLine(assertion.getMessage()
                        + " At " + assertion.getLocation().getContext()));
            }
        }
        var lines = new StringBuilder();
        rules.forEach((rule, text) -> lines.append("BROKEN ").append(rule).append(' ')
            .append(text).append('\n'));
        return lines.toString();
    }

    private static String oneLine(String text) {
        return text.replaceAll("\\s+", " ");
    }
}
