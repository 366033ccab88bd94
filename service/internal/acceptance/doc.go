// Package acceptance holds tests alone: the service as a client sees it, a request of JSON in, an answer of JSON out, against numbers from
// outside the project. It has four parts: cases in which a naive answer is dangerously optimistic, published examples, what the answers
// about switching events and the first charge hold, and faults of requests.
//
// The published values and the tests that hold the service to them; a test without a path stands here:
//
//	charge budget and capacitor
//	A01                                   TestPublishedSizing, TestPublishedDroop; calc/charge.TestPublishedSizing, calc/charge.TestPublishedVoltageBudget
//	A02                                   TestPublishedSizing; calc/charge.TestPublishedSizing
//	A03                                   TestPublishedDroop; calc/charge.TestPublishedDrop
//	A04                                   TestPublishedDroop; calc/charge.TestPublishedChargeAndCapacitance
//	A05                                   TestPublishedDroop, TestPublishedHoldInFindings; calc/charge.TestPublishedDrop, calc/recharge.TestPublishedHoldAndDroop
//	A06, A07                              TestPublishedResistor; calc/recharge.TestPublishedResistorDeficit
//	A11                                   TestPublishedSizing, TestPublishedExampleBreaksItsOwnLimit; calc/charge.TestPublishedDrop
//	A15, with and without the resistor    TestPublishedSizing; calc/charge.TestPublishedSizing
//	A16                                   TestPublishedSizing; calc/charge.TestPublishedSizing
//	A21                                   TestPublishedDroop, TestPublishedHoldInFindings; calc/charge.TestPublishedDrop, calc/recharge.TestPublishedHoldAndDroop
//	A22                                   TestPublishedSizing; calc/charge.TestPublishedSizing
//
//	resistor, diode, start-up
//	B01                                   TestPublishedResistor; calc/recharge.TestPublishedCharging
//	B04, B05                              TestPublishedResistor, TestPrechargeStressesTheElement; calc/recharge.TestPublishedCharging,
//	                                      calc/startup.TestPublishedPeakCurrent, calc/startup.TestPublishedEnergy
//	D01                                   TestPublishedFirstCharge, TestPrechargeOfThePublishedExample; calc/recharge.TestPublishedCharging,
//	                                      calc/startup.TestPublishedInitialCharge
//	D05                                   TestPrechargeWaitsForTheLockout
//	D10                                   TestPublishedHoldTime, TestPublishedHoldInFindings; calc/charge.TestPublishedHoldTime
//
//	node transients and overcharge
//	E05                                   TestPublishedUndershoot; calc/transient.TestPublishedUndershoot
//	E06, as an undershoot                 TestPublishedUndershoot
//	F01                                   TestPublishedSignRule; calc/recharge.TestPublishedNegativeNode
//	F02                                   TestPublishedOvercharge, TestPublishedOverchargeByUndershoot; calc/recharge.TestPublishedNegativeNode
//	F03                                   TestPublishedOvercharge; calc/recharge.TestPublishedNegativeNode
//	P1                                    TestPublishedOvercharge, TestPublishedOverchargeByUndershoot
//	P2, P3                                TestCommonPractice
//	directions of switching events        TestPracticeGateResistance, TestPracticeInductance, TestPracticeKelvinSource, TestPracticeOffBias,
//	                                      TestPracticeMeasurementDecides
//
//	gate drive and losses
//	G01                                   TestPublishedEdge; calc/transient.TestPublishedSwitchingTime
//	G02, G03                              TestPublishedEdge; calc/transient.TestPublishedSlope
//	G05                                   TestPublishedGateCurrent
//	H02                                   TestPublishedThresholdShift
//	H03                                   calc/transient.TestPublishedAverageCapacitance
//	I01, I08                              TestPublishedGateLoss; calc/loss.TestPublishedGate
//	I02                                   TestPublishedGateLoss; calc/loss.TestPublishedDriverGate
//	I06                                   TestPublishedPower; calc/loss.TestPublishedPower
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
// E07, the inductance of a via by its dimensions, and that of a length of track in E06 are not computed: a stage gives its inductances.
//
// The cases of optimism, by the number of the design: 1 TestPullDownLoadsTheHeldSupply, 2 TestLittleRemainsOfTheNominalCapacitance,
// 3 TestCapacitanceCancels and TestCancellingCapacitanceIsNotSizedUp, 4 TestDeadTimePumpsTheGate and TestPeakDetectorNamesItsInterval,
// 5 TestUndershootFallsInTheLongerRow, 6 TestLockoutTurnsOffBelowCOM, 7 TestLockoutDoesNotSuitTheSwitch, 8
// TestClampHoldsTheHighSide, 9 TestUnknownInductanceIsNotNone and with another datum TestMissingDataNeverPasses, 10 TestLowSidePulseVanishes.
//
// Starts that never come about and holds that nothing ends stand in start_hold_test.go; the order in which the stages on a supply are charged, in
// precharge_order_test.go.
package acceptance
