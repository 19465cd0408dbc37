"""Every advisory a calibration can carry beside those of all answers: what is said, and when."""

from models.advisories import Advice, Advisory
from models.registry import Registry

CALIBRATION_ADVISORIES: Registry[Advisory] = Registry(
    "advisory",
    Advisory(key="calibration-scope", condition="Always, in an answer of a calibration.",
             text="The curve holds for this soil as its pairs were: density, temperature, salinity "
             "and probe. It was fitted from permittivity {low} to {high}; estimates made with it "
             "do not know this range, so look at it where readings leave it. They add nothing for "
             "another temperature than that of the pairs, and they take out the conduction of "
             "readings that hold bulk_conductivity and a frequency: pairs as they were read go "
             "with readings without these."),
    Advisory(key="calibration-standard-error", condition="The answer holds a mixing_model.",
             text="In mixing_model, standard_error (and slope_u or linear_u where it is there) "
             "stands for all that a new reading needs beside the error of its own permittivity: "
             "scatter of the soil, the covariance of the coefficients, errors that the pairs "
             "share, and Student's factor for few pairs, at a coverage probability of "
             "{probability}. That is {least} to {most} m3/m3 over the range, met to {off} %; "
             "the coefficients' own uncertainties are under coefficients."),
    Advisory(key="calibration-unstated", condition="No pair states an uncertainty.",
             text="No uncertainty was stated: all pairs count alike, and their scatter holds the "
             "errors of oven, density and probe. Estimates with this curve need no uncertainty of "
             "a permittivity read by the same probe: it is in standard_error. Noise of the "
             "permittivity makes the curve too flat; state apparent_permittivity_u and "
             "water_content_u to have it fitted with errors in both."),
    Advisory(key="calibration-scattered", condition="Chi-square of the pairs would be exceeded in "
             "less than 2.5 % of cases, were the stated uncertainties all there is.",
             text="The pairs scatter more than their uncertainties explain (chi-square "
             "{chi_square} for {degrees} degrees of freedom): {scatter} m3/m3 of scatter was added "
             "to every water content as the soil's own, in weights, covariance and bands. Another "
             "form, two soils in one, or uncertainties that leave something out do that."),
    Advisory(key="calibration-overstated", condition="Chi-square of the pairs would be exceeded "
             "in more than 97.5 % of cases.",
             text="The pairs scatter less than their uncertainties say (chi-square {chi_square} "
             "for {degrees} degrees of freedom): were shared errors stated as each pair's own? "
             "Nothing was made smaller for it."),
    Advisory(key="calibration-outlier", condition="The largest residual, over its own standard "
             "deviation, would be exceeded by one in so many pairs in less than 5 % of cases.",
             text="Pair {pair} (permittivity {permittivity}) lies {residual} m3/m3 off the curve, "
             "{times} of its standard deviations: look at how it was measured. It was used."),
    Advisory(key="calibration-turns", condition="The curve falls somewhere within the range.",
             text="Water content falls with permittivity within the range, from permittivity "
             "{place} on: no soil does that. Ask for a form with fewer coefficients, or give more "
             "pairs there."),
    Advisory(key="calibration-flat", condition="The rise of the curve over the range is less than "
             "twice its standard uncertainty, or there is none.",
             text="The curve rises by {rise} m3/m3 over the range, known to {u} m3/m3: these pairs "
             "do not tell water content from permittivity. Give pairs from dry to near saturated."),
    Advisory(key="calibration-unusable", condition="The coefficients are not what the mixing model "
             "takes.",
             text="There is no mixing_model: {why}. Ask for another form, or give pairs over more "
             "of the range from dry to wet."),
    Advisory(key="calibration-form", condition="No form was asked for.",
             text="{form} was taken: of the forms that can be used as mixing_model, that with the "
             "fewest coefficients within 2 of the smallest corrected Akaike criterion; forms "
             "holds all of them, each with its leave-one-out error."),
    Advisory(key="calibration-other-form", condition="A form was asked for, and the corrected "
             "Akaike criterion of the one that the pairs would choose is smaller by more than 10.",
             text="{other} goes through these pairs much better than {form}: leave-one-out error "
             "{other_error} m3/m3, not {error}. Leave form out to have it taken."),
    Advisory(key="calibration-design", condition="There are fewer than 10 pairs, fewer than 5 "
             "levels or 3 replicates at one of them, no level is told, or the water contents span "
             "less than 0.15.",
             text="Common practice asks for more than these pairs: {lacking}. Few pairs make a "
             "wide band, and leave unseen how the curve bends."),
    Advisory(key="calibration-extrapolated", condition="A band was asked for outside the range.",
             text="{count} permittivities lie outside the range of the pairs ({low} to {high}): "
             "the band there is that of the curve going on as it is, which nothing shows."),
    Advisory(key="calibration-density-exact", condition="Gravimetric water contents came with one "
             "bulk density for all of them and no uncertainty of it.",
             text="One bulk density for all pairs came without bulk_density_u: an error of it "
             "scales the whole curve, and is not in the band."),
)  # fmt: skip


def advise(code: str, **places: object) -> Advice:
    """One advisory with its places filled in."""
    return Advice(code, CALIBRATION_ADVISORIES[code].text.format(**places))
