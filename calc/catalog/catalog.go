// Package catalog is the rule catalogue: one rule a file, and this list. The order of the list is the order of answers.
package catalog

import "floatrail/calc/rule"

// RuleSet is the version of the catalogue. It changes whenever a rule's verdict on some stage may change.
const RuleSet = "2026.12.4"

// All lists the rules in their order.
func All() []*rule.Rule {
	return []*rule.Rule{
		chargeDroop, chargeLowestVoltage, chargeGateSufficiency, chargeCapacitance, chargeOversize, chargeStandingLoad,
		chargeChargeCondition, chargeLockoutSuitsSwitch,
		capacitorVoltage, capacitorDielectric, capacitorEffectiveValue, capacitorLeakage, capacitorESRDrop,
		diodeReverseVoltage, diodePeakCurrent, diodeAverageCurrent, diodeRecovery, diodeHotLeakage,
		resistorPulseEnergy, resistorPower,
		supplyReservoirSag, supplyCurrent, supplyFloatingSlew,
		dutyRechargeWindow, dutyLargestDuty, dutyLongestOnTime, dutyShortestPulse, dutyDeadTime, dutyIdleRefresh, dutyPreCharge,
		gateOvervoltage, gateClampWindow, gateMillerLow, gateMillerHigh, gateNodeResistor, gateNegative, gateDriveCurrent, gateDamping,
		nodeUndershootStatic, nodeUndershootPulse, nodeRailBelowCOM, nodeOperationalRange, nodeRailOvershoot, nodeSwitchOvershoot, nodeSlew,
		nodeOverload, nodeMeasuredSlope,
		thermalDriver, thermalDiode,
		dataAssumption,
	}
}

// Find gives the rule of an id.
func Find(id string) (*rule.Rule, bool) {
	for _, r := range All() {
		if r.ID == id {
			return r, true
		}
	}
	return nil, false
}

// Families lists the families in their order.
func Families() []string {
	var out []string
	for _, r := range All() {
		if f := r.Family(); len(out) == 0 || out[len(out)-1] != f {
			out = append(out, f)
		}
	}
	return out
}
