import java.io.FileInputStream;
import java.util.ArrayList;
import java.util.Date;
import java.util.LinkedHashSet;
import java.util.Map;
import java.util.Set;
import java.util.TreeMap;
import javax.xml.parsers.DocumentBuilderFactory;
import org.verapdf.gf.foundry.VeraGreenfieldFoundryProvider;
import org.verapdf.pdfa.Foundries;
import org.verapdf.pdfa.PDFAParser;
import org.verapdf.pdfa.flavours.PDFAFlavour;
import org.verapdf.pdfa.results.TestAssertion;
import org.verapdf.pdfa.results.ValidationResult;
import org.verapdf.pdfa.validation.profiles.Profiles;
import org.verapdf.pdfa.validation.profiles.Rule;
import org.verapdf.pdfa.validation.profiles.RuleId;
import org.verapdf.pdfa.validation.profiles.ValidationProfile;
import org.verapdf.pdfa.validation.profiles.Variable;
import org.w3c.dom.Element;
import org.w3c.dom.Node;
import org.w3c.dom.NodeList;

/**
 * Checks PDF files by a profile of veraPDF: {@code Verify 3a|ua1 FILE...}. The profile is read here, since the
 * library's own reader needs a part of Java that is no longer shipped with it.
 */
public class Verify {
    static Element child(Element parent, String name) {
        for (Node node = parent.getFirstChild(); node != null; node = node.getNextSibling()) {
            if (name.equals(node.getNodeName())) {
                return (Element) node;
            }
        }
        return null;
    }

    static String text(Element parent, String name) {
        Element found = child(parent, name);
        return found == null ? "" : found.getTextContent();
    }

    static Rule rule(Element element) {
        Element id = child(element, "id");
        PDFAFlavour.Specification standard = PDFAFlavour.Specification.valueOf(id.getAttribute("specification"));
        RuleId number = Profiles.ruleIdFromValues(
                standard, id.getAttribute("clause"), Integer.parseInt(id.getAttribute("testNumber")));
        String deferred = element.getAttribute("deferred");
        return Profiles.ruleFromValues(
                number,
                element.getAttribute("object"),
                deferred.isEmpty() ? null : Boolean.valueOf(deferred),
                element.getAttribute("tags"),
                text(element, "description"),
                text(element, "test"),
                Profiles.errorFromValues(text(child(element, "error"), "message"), new ArrayList<>()),
                new ArrayList<>());
    }

    static ValidationProfile profile(PDFAFlavour flavour, String name) throws Exception {
        String path = "org/verapdf/pdfa/validation/" + name + ".xml";
        Element root = DocumentBuilderFactory.newInstance()
                .newDocumentBuilder()
                .parse(Verify.class.getClassLoader().getResourceAsStream(path))
                .getDocumentElement();
        Set<Rule> rules = new LinkedHashSet<>();
        NodeList found = root.getElementsByTagName("rule");
        for (int i = 0; i < found.getLength(); i++) {
            rules.add(rule((Element) found.item(i)));
        }
        Set<Variable> variables = new LinkedHashSet<>();
        found = root.getElementsByTagName("variable");
        for (int i = 0; i < found.getLength(); i++) {
            Element one = (Element) found.item(i);
            variables.add(Profiles.variableFromValues(
                    one.getAttribute("name"), one.getAttribute("object"), text(one, "defaultValue"), text(one, "value")));
        }
        return Profiles.profileFromValues(
                flavour, Profiles.profileDetailsFromValues(name, name, "", new Date(0)), "", rules, variables);
    }

    static boolean passes(String file, PDFAFlavour flavour, ValidationProfile profile) throws Exception {
        try (PDFAParser parser = Foundries.defaultInstance().createParser(new FileInputStream(file), flavour)) {
            ValidationResult result =
                    Foundries.defaultInstance().createValidator(profile, -1, true, false, false).validate(parser);
            System.out.println(file + " " + flavour + " compliant=" + result.isCompliant() + " checks="
                    + result.getTotalAssertions() + " rules=" + profile.getRules().size());
            Map<String, String> failures = new TreeMap<>();
            for (TestAssertion assertion : result.getTestAssertions()) {
                if (assertion.getStatus() == TestAssertion.Status.FAILED) {
                    String clause = assertion.getRuleId().getClause() + "-" + assertion.getRuleId().getTestNumber();
                    failures.putIfAbsent(clause, assertion.getMessage() + " @ " + assertion.getLocation().getContext());
                }
            }
            failures.forEach((clause, message) -> System.out.println("   " + clause + ": " + message));
            return result.isCompliant();
        }
    }

    public static void main(String[] arguments) throws Exception {
        java.util.logging.LogManager.getLogManager().reset();
        VeraGreenfieldFoundryProvider.initialise();
        PDFAFlavour flavour = PDFAFlavour.fromString(arguments[0]);
        boolean universal = arguments[0].startsWith("ua");
        String name = universal ? "PDFUA-" + arguments[0].substring(2) : "PDFA-" + arguments[0].toUpperCase();
        ValidationProfile profile = profile(flavour, name);
        boolean good = true;
        for (int i = 1; i < arguments.length; i++) {
            good &= passes(arguments[i], flavour, profile);
        }
        System.exit(good ? 0 : 1);
    }
}
