// Package acceptance holds tests alone: the service as a client sees it, a request of JSON in, an answer of JSON out, against numbers from
// outside the project. It has three parts: cases in which a naive answer is dangerously optimistic, published examples, and faults of
// requests.
//
// The published values and the tests that hold the service to them; a test without a path stands here:
//
//	charge budget and capacitor
//	A01                                   TestPublishedSizing, TestPublishedDroop; calc/charge.TestPublishedSizing, calc/charge.TestPublishedVoltageBudget
//	A02                                   TestPublishedSizing; calc/charge.TestPublishedSizing
//	A03                                   TestPublishedDroop; calc/charge.TestPublishedDrop
//	A04                                   TestPublishedDroop; calc/charge.TestPublishedChargeAndCapacitance
//	A05                                   TestPublishedDroop; calc/charge.TestPublishedDrop, calc/recharge.TestPublishedHoldAndDroop
//	A06, A07                              TestPublishedResistor; calc/recharge.TestPublishedResistorDeficit
//	A11                                   TestPublishedSizing, TestPublishedExampleBreaksItsOwnLimit; calc/charge.TestPublishedDrop
//	A15, with and without the resistor    TestPublishedSizing; calc/charge.TestPublishedSizing
//	A16                                   TestPublishedSizing; calc/charge.TestPublishedSizing
//	A21                                   TestPublishedDroop; calc/charge.TestPublishedDrop, calc/recharge.TestPublishedHoldAndDroop
//	A22                                   TestPublishedSizing; calc/charge.TestPublishedSizing
//
//	resistor, diode, start-up
//	B01, B04, B05                         TestPublishedResistor; calc/recharge.TestPublishedCharging
//	D01                                   TestPublishedFirstCharge; calc/recharge.TestPublishedCharging
//	D10                                   TestPublishedHoldTime; calc/charge.TestPublishedHoldTime
//
//	overcharge
//	F01                                   TestPublishedSignRule; calc/recharge.TestPublishedNegativeNode
//	F02, F03                              TestPublishedOvercharge; calc/recharge.TestPublishedNegativeNode
//	P1                                    TestPublishedOvercharge
//	P2, P3                                TestCommonPractice
//
//	lists
//	EIA-198 class 2 codes                 calc/capacitor.TestEveryClassTwoCode, calc/capacitor.TestNamedClasses
//	ageing                                calc/capacitor.TestAgeing, calc/capacitor.TestClassAgeing
//	insulation, electrolytic leakage      TestPublishedCapacitorLeakage; calc/capacitor.TestInsulationLeakage, calc/capacitor.TestElectrolyticLeakage
//	IEC 60063                             calc/preferred.TestSeriesAsPublished, calc/preferred.TestE192Exception
//	IEC 60062                             calc/quantity.TestParseLetterCodes, calc/quantity.TestParseTolerance, calc/quantity.TestParseMarking;
//	                                      L50 has two readings in use and is refused: calc/quantity.TestParseRefuses
//	kT/q                                  TestThermalVoltage; calc/recharge.TestFitThroughPoints
//	leakage doubles in 10 K, -2 mV/K      TestDiodeOverTemperature; calc/recharge.TestAtTemperature
//	derating                              TestPublishedDerating; calc/capacitor.TestDeratedVoltage
//
// E05 to E07 need the model of switching events, D05 that of start-up, G01 to I08 those of gate drive and losses, which this rule set has not.
//
// The cases of optimism, by the number of the design: 1 TestPullDownLoadsTheHeldSupply, 2 TestLittleRemainsOfTheNominalCapacitance,
// 3 TestCapacitanceCancels, 4 TestDeadTimePumpsTheGate, 7 TestLockoutDoesNotSuitTheSwitch, 8 by its on-times TestClampHoldsTheHighSide,
// 9 with data that this rule set asks for TestMissingDataNeverPasses, 10 TestLowSidePulseVanishes. 5 and 6 need the model of switching events.
package acceptance
