"""Every advisory an answer can carry: what is said, and when; no switch removes one."""

from dataclasses import dataclass
from string import Formatter

from models.registry import Registry


@dataclass(frozen=True, slots=True, kw_only=True)
class Advisory:
    """A sentence that belongs to an answer where its condition holds."""

    key: str
    condition: str
    text: str
    """With the places in braces filled in."""

    @property
    def places(self) -> tuple[str, ...]:
        """Names of what must be filled in."""
        return tuple(name for _, name, _, _ in Formatter().parse(self.text) if name)


@dataclass(frozen=True, slots=True)
class Advice:
    """One advisory of one answer."""

    code: str
    text: str


ADVISORIES: Registry[Advisory] = Registry(
    "advisory",
    Advisory(key="indirect-measurement", condition="Always.",
             text="Estimate from an indirect measurement. The band covers the stated inputs and "
             "model only; installation, air gaps and soil variability may add more."),
    Advisory(key="numbers-not-verdicts", condition="Always.",
             text="Numbers, not verdicts: water content alone does not give pore pressure, "
             "strength, seepage or the need to irrigate. Local codes, the site's own limits and a "
             "licensed engineer or qualified agronomist who knows the site decide."),
    Advisory(key="generic-equation", condition="The mixing model was not fitted to this soil.",
             text="No soil-specific calibration was supplied; organic, saline, high-clay or stony "
             "soils may differ by more than the band."),
    Advisory(key="model-chosen", condition="No mixing model was named.",
             text="{model} was chosen: {why}"),
    Advisory(key="all-without-salt",
             condition="All mixing models were asked, of readings or with words that concern salt.",
             text="All models side by side give the water content alone: name one mixing model for "
             "the conductivities of bulk, pore water and extract."),
    Advisory(key="texture-defaults", condition="The texture class filled in soil properties.",
             text="{names} came from the texture class {texture}: a default, never a field "
             "value; a measured one narrows the band."),
    Advisory(key="no-uncertainty-stated",
             condition="A value that enters the estimate came without a standard uncertainty.",
             text="No standard uncertainty was stated for {names}: their share is not in the "
             "band. Give {example} beside the value."),
    Advisory(key="pore-water-model-chosen",
             condition="Bulk conductivity came and no pore-water model was named.",
             text="{model} gives the conductivity of the pore water: {why}"),
    Advisory(key="pore-water-estimates",
             condition="Coefficients of the pore-water model were estimated from texture.",
             text="{names} were estimated from the texture class {texture}, from memory of what is "
             "commonly held: coefficients fitted at the site narrow the band."),
    Advisory(key="salinity-limits", condition="The answer holds conductivities of pore water.",
             text="Bulk, pore-water and extract conductivity are three numbers; each is named and "
             "at 25 Cel where it says so. Conductivity does not show sodium, boron, chloride or "
             "pH, and low salinity does not rule out a sodium problem: obtain a laboratory "
             "analysis before leaching, amending or changing crop."),
    Advisory(key="extract-assumptions",
             condition="The answer holds the conductivity of the saturation extract.",
             text="The extract follows from a balance of salt (saturation percentage: {origin}): "
             "nothing dissolves or settles as water is added. Gypsum adds up to about 2 dS/m."),
    Advisory(key="pore-water-open", condition="The ends of the band of a pore-water conductivity "
             "are more than a factor of 100 apart, or it has no upper end.",
             text="The conductivity of the pore water is hardly known in {count} readings: the "
             "ends of its band are more than a factor of 100 apart, or there is no upper one, and "
             "say more than the value. Little bulk conductivity or water, or a soil known by its "
             "texture alone, do that."),
    Advisory(key="frequency-assumed", condition="No frequency was given.",
             text="No frequency was given: {frequency} GHz was assumed, and nothing was corrected "
             "for conduction. Give probe.frequency or a frequency column: below 0.3 GHz clay and "
             "conduction make a soil read too wet, which the band does not hold otherwise."),
    Advisory(key="bulk-not-drawn", condition="Monte Carlo propagation was asked for and "
             "there are conductivities among the answers.",
             text="Draws were made from the reading to the water content, to the pore water and to "
             "the extract; the bulk conductivity at 25 Cel, a product of three factors, keeps its "
             "first-order band."),
    Advisory(key="temperature-assumed", condition="The caller said assume.temperature.",
             text="Temperature was assumed to be {temperature} Cel, to {u} K (k = 1), where the "
             "reading has none."),
    Advisory(key="model-range", condition="A soil property or the frequency is outside the "
             "model's declared range.",
             text="Outside the conditions in which {model} was established: {names}. The band is "
             "widened."),
    Advisory(key="porosity-disagrees", condition="Porosity and densities are all given and "
             "contradict by more than 0.05.",
             text="porosity {porosity} and 1 - bulk_density/particle_density = {derived} "
             "contradict; the porosity as given was used."),
    Advisory(key="own-curve-corrected",
             condition="Readings that tell their conduction meet a curve of the caller's own "
             "coefficients.",
             text="The readings are corrected for conduction before {model} sees them: that is "
             "right where the curve was fitted to corrected permittivities. For one that was "
             "fitted to them as read, leave out bulk_conductivity or the frequency."),
    Advisory(key="texture-disagrees", condition="A content of clay or sand is given that the named "
             "texture class cannot have.",
             text="{name} {value} is not that of the texture class {texture} (about {mean}): the "
             "content as given was used, and what else the class fills in is that of {texture}."),
    Advisory(key="unit-suspected", condition="Values of one quantity are impossible as sent and "
             "would be possible in a unit often sent by mistake.",
             text="{count} values of {name} are impossible in {unit} and possible in {other}, "
             'such as {value}: name the unit, for example "units": {{"{name}": "{other}"}}.'),
    Advisory(key="bulk-unit-doubted",
             condition="A bulk conductivity is possible and above 5 dS/m, and its unit was not "
             "named.",
             text="{count} values of {name} are above 5 dS/m, up to {value}, as in few soils: "
             'were they in {other}? Then name the unit: "units": {{"{name}": "{other}"}}.'),
    Advisory(key="travel-time-impossible", condition="A travel time is shorter than that of light "
             "along the rods, or longer than a permittivity of 200 makes it.",
             text="{count} travel times such as {value} {unit} are impossible: along rods of "
             "{length} m, there and back, {low} to {high} {unit} are possible. Check the unit, "
             "probe_length, and that the time begins where the rods do."),
    Advisory(key="uncertainty-not-used", condition="A column <quantity>_u holds text that is no "
             "number, a number below zero, or one wider than all that is possible.",
             text="{count} values of {name} cannot be used, such as {value}: expected a number of "
             "at least 0, no wider than what is possible. There {about} was not used either."),
    Advisory(key="uncertainty-alone", condition="An uncertainty came without its value.",
             text="{name} came without {about}, so nothing was made of it."),
    Advisory(key="name-not-known", condition="A column of a table is none of ours, and nearly one "
             "or another word for one.",
             text="column {name} was not read, and passed through; did you mean {meant}?"),
    Advisory(key="unreadable-rows", condition="A row of a table cannot be taken apart.",
             text="{count} rows cannot be taken apart, the first of them on line {line}: expected "
             "{expected}, found {found}."),
    Advisory(key="draws-not-made", condition="draws or seed came without a propagation by draws.",
             text="{names} came without propagation monte-carlo: no draws were made, the band is "
             "that of first order."),
    Advisory(key="frozen-readings", condition="A reading is at or below 0 Cel.",
             text="{count} readings were taken at or below 0 Cel: unfrozen water only."),
    Advisory(key="probe-not-calibrated", condition="A waveform came without traces of its probe in "
             "air and in water.",
             text="Length and offset of the rods are as described, or as a single trace shows "
             "them: traces of the same probe in air and in water tell what both really are. Where "
             "an end cannot be seen, the rods may begin elsewhere than it seems: probe_offset or "
             "head say where."),
    Advisory(key="unlike-calibration", condition="The first reflection of a waveform is elsewhere "
             "than that of its calibration, of the other sign, after another level, or none.",
             text="{count} waveforms do not begin as their calibration does, whose first "
             "reflection {way} at {time} ns of two-way time from a level of {level} (the first of "
             "them: {theirs}), and have no numbers: another cable or velocity factor, another unit "
             "of the axis, one-way time, reflections upside down or on another scale, or no trace "
             "of this probe."),
    Advisory(key="no-steps", condition="A waveform that no calibration shows how to begin is level "
             "over less than 35 % of its points or over all, or begins within its first "
             "reflection.",
             text="{count} waveforms hold no steps between levels that stand out from noise, or "
             "begin amid their first reflection, and have no numbers: start the window before "
             "the cable ends, and send what a step reflects, neither its slope nor a swept sine."),
    Advisory(key="level-suspected", condition="The trace in air ends far from +1, or the level "
             "before the first reflection is not that of the cable on its instrument.",
             text="Levels are not those of reflection coefficients: {found}. Volts or counts "
             "belong into level, with level_matched and level_open; another cable into "
             "probe.cable.impedance. Conductivities follow these levels."),
    Advisory(key="axis-unit-suspected", condition="A waveform on an axis in m rises more slowly "
             "than steps do and shows no end of the rods, and shows one if its axis is in ns.",
             text="Read on an axis in ns, {count} waveforms without a number show the end of the "
             'rods: were they sent in ns? Then name it: "axis_unit": "ns".'),
    Advisory(key="waveform-clipped", condition="Many points of a waveform lie exactly at its "
             "highest or lowest level.",
             text="{count} waveforms lie exactly at their highest or lowest level over many "
             "points: cut off at the end of the instrument's range? Times and levels read from "
             "them are off by more than their bands say."),
    Advisory(key="long-record-contradicted", condition="The conductivities that a waveform and its "
             "long record tell are five standard uncertainties and 25 % apart.",
             text="The long records of {count} waveforms tell another conductivity than the "
             "waveforms themselves: of another medium, or on another scale? That of the long "
             "record was used."),
    Advisory(key="probe-constant-contradicted", condition="The probe constant as stated, or by the "
             "impedance of the rods, is not within 10 % of what traces in air and in water tell.",
             text="The probe was described with a probe constant of {stated} 1/m; the traces in "
             "air and in water tell {shown} 1/m, rods of {impedance} Ohm. {used}: check "
             "probe_impedance, rods or probe_constant."),
    Advisory(key="calibration-misfit", condition="The line that explains the calibration traces "
             "best leaves a reduced chi-square above 25.",
             text="No line explains the traces in air, in water and shorted together: the best "
             "misses them by {times} times their noise. Water that conducts, a wrong temperature "
             "of it, another cable, or a trace of something else does that."),
    Advisory(key="effective-length", condition="The effective length of rods differs from their "
             "own by more than 5 %.",
             text="Air and water give the rods an effective length of {length} m, their own is "
             "{own} m: a long cable, a wrong temperature of the water, or another probe."),
    Advisory(key="series-resistance-assumed", condition="A waveform came without a trace of "
             "its shorted rods and without series_resistance.",
             text="The resistance of the cable was assumed: shorting the end of the rods shows it, "
             "and matters more the better the soil conducts."),
    Advisory(key="probe-constant-missing", condition="Nothing tells the probe constant.",
             text="There is no conductivity: give probe_constant, probe_impedance or rods, or "
             "traces in air and in water."),
    Advisory(key="permittivities-beside", condition="More than one kind of permittivity came.",
             text="Several kinds of permittivity came ({names}); {used} was used."),
    Advisory(key="sample-length-suspected", condition="The permeability of a sample between two "
             "ports is not 1, and its two sides are alike.",
             text="Check sample_length before calling the sample magnetic: with {length} m the "
             "permeability would be 1, {own} m was given."),
    Advisory(key="renormalised", condition="A Touchstone file refers to another impedance than the "
             "empty line, or before a tip than the other files.",
             text="Touchstone files that refer to {others} Ohm (R or [Reference]), {count} in all, "
             "were brought to {impedance} Ohm: that of the empty line (line.impedance), or before "
             "a tip that of the first file. Where a file is wrong about it, change R in it."),
    Advisory(key="phase-unit-suspected", condition="A sweep or spectrum of eight points or more "
             "came as magnitude and degrees, and no phase leaves -pi to pi.",
             text="No phase leaves -3.1416 to 3.1416 ({largest} at most): were these "
             "radians? Then send degrees (radians times 57.29578), or real and imaginary parts."),
    Advisory(key="aperture-not-told", condition="A tip was calibrated with three standards.",
             text="Three standards cannot tell the aperture: the {model} model was taken at its "
             "word{share}. A fourth standard, such as methanol or ethanol at a known temperature, "
             "fits the aperture and shows what is wrong."),
    Advisory(key="raw-record-flags", condition="What a raw record was turned into carries a flag "
             "of its own there, or the record was conjugated.",
             text="Raw records are flagged {flag} where they were read, {count} in all ({places}): "
             "{meaning}"),
)  # fmt: skip


def advise(code: str, **places: object) -> Advice:
    """One advisory with its places filled in."""
    return Advice(code, ADVISORIES[code].text.format(**places))
