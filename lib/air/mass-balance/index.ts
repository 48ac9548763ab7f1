export { type BuildUp, fitBuildUp, threePointRate } from './build-up'
export { type HeadcountInput, headcount } from './headcount'
export { flowPerPersonLps, type Propagated, steadyFlowPerPersonLps } from './per-person'
export {
  meanBuildUpExcessPpm,
  REBREATHED_CAUTION,
  rebreathedFraction,
  relativeRebreathed,
  type SharedAir,
} from './rebreathed'
export { fitTransientBalance, type TransientFit, type TransientInput } from './transient'
export { co2AfterStepPpm, co2CoursePpm, outdoorAirFraction, steadyFlowLps, type ZoneStep } from './zone'
