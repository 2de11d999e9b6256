import java.io.File;
import org.verapdf.gf.foundry.VeraGreenfieldFoundryProvider;
import org.verapdf.pdfa.Foundries;
import org.verapdf.pdfa.PDFAParser;
import org.verapdf.pdfa.flavours.PDFAFlavour;
import org.verapdf.pdfa.results.TestAssertion;
import org.verapdf.pdfa.results.ValidationResult;

/** For each file and each of the two standards a line of name, standard, verdict and number of checks; then a line for each fault. */
public class PdfVerdict {
    public static void main(String[] files) throws Exception {
        VeraGreenfieldFoundryProvider.initialise();
        for (String file : files) {
            for (PDFAFlavour flavour : new PDFAFlavour[] {PDFAFlavour.PDFA_3_A, PDFAFlavour.PDFUA_1}) {
                try (PDFAParser parser = Foundries.defaultInstance().createParser(new File(file), flavour)) {
                    ValidationResult result = Foundries.defaultInstance().createValidator(flavour, false).validate(parser);
                    String name = new File(file).getName() + "\t" + flavour.getId();
                    System.out.println(name + "\t" + result.isCompliant() + "\t" + result.getTotalAssertions());
                    for (TestAssertion one : result.getTestAssertions()) {
                        if (one.getStatus() == TestAssertion.Status.FAILED) {
                            String clause = one.getRuleId().getClause() + "-" + one.getRuleId().getTestNumber();
                            System.out.println(name + "\t" + clause + "\t" + one.getMessage() + "\t" + one.getLocation().getContext());
                        }
                    }
                }
            }
        }
    }
}
