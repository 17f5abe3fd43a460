package report

// SafetyShort is the caution that stands wherever there is room for one sentence: on the terminal, in the foot of a page.
const SafetyShort = "Work on or near live parts is for qualified, authorised persons under the local code and the site's rules; " +
	"this report is engineering guidance, not proof of safety or compliance."

// SafetyTitle heads the cautions.
const SafetyTitle = "Safety, and what this report is not"

// SafetyCautions are the cautions that every document carries, most important first. They follow general practice and
// defer to the documents they name; none replaces local law, the site's procedures or a licensed person's judgement.
func SafetyCautions() []string {
	return append([]string(nil), cautions...)
}

var cautions = []string{
	"National law, the local electrical code, the network operator's rules and the site's own procedures come before anything " +
		"in this report.",
	"Only qualified and authorised persons, licensed where the law asks for it, may open covers, connect instruments or work on or near live " +
		"parts: after a risk assessment, with boundaries, protective equipment and a permit as NFPA 70E and OSHA 29 CFR 1910 " +
		"Subpart S (United States), EN 50110-1 with its national annex (Europe) or the local equivalent ask. Arc-flash energy is a matter for a " +
		"study, for instance to IEEE 1584.",
	"De-energise where possible and prove the absence of voltage before connecting or removing anything (IEC 61243-3 describes " +
		"voltage detectors).",
	"Instruments, leads and sensors need the measurement category and voltage of the point, inspected before use (IEC 61010-1, " +
		"61010-2-030, 61010-031, 61010-2-032). The lowest marking among them counts. Use fused voltage leads.",
	"Never open the secondary of a current transformer under load: short it at its shorting block first. Never short the " +
		"secondary of a voltage transformer.",
	"Capacitors hold charge after switching off: wait, discharge, prove dead. Reactors and filters run hot. A neutral can " +
		"carry more current than a phase: never open a shared neutral live. A hot neutral or a swollen capacitor is a reason to stop.",
	"Do not switch capacitor steps, bypass filters or change settings because of this report without the operator of the " +
		"installation, and the network operator where it concerns them.",
	"The findings hold for the recorded period, operating state and point only. They certify neither safety nor compliance; " +
		"a responsible engineer confirms them against the purchased text of the standard, and the network operator's document prevails.",
	"Figures on transformers, cables, capacitors, resonance and motors are screening values. A qualified engineer designs any change.",
	"Check every sensor's ratio, direction and phase before relying on a recording. Load profiles show how a site is run: " +
		"share this report accordingly.",
}
