// What the operations of aim, peak search and radio figures answer, as far as the pages show it (the published schemas
// hold the whole).
import type { Method } from '../types.ts';

export interface Target {
  true_bearing_deg: number;
  elevation_deg: number;
  geometric_elevation_deg: number;
  distance_m: number;
  slant_range_m: number;
  u_bearing_deg: number;
  back_bearing_deg: number | null;
  remarks: string[];
  method: Method;
}

export interface Compass {
  declination_deg: number;
  uncertainty_deg: number;
  model: string;
  valid_until: number;
  valid: boolean;
  why_not: string | null;
  caution: string | null;
  bearing: { true_bearing_deg: number; magnetic_bearing_deg: number; u_deg: number; tag: string; text: string } | null;
  method: Method;
}

export interface Sun {
  azimuth_deg: number;
  elevation_deg: number;
  apparent_elevation_deg: number;
  shadow_azimuth_deg: number | null;
  azimuth_rate_deg_per_min: number;
  usable: boolean;
  why_not: string | null;
  caution: string;
}

export interface Sight {
  azimuth_deg: number;
  u_deg: number;
  reference_azimuth_deg: number;
  reference_elevation_deg: number;
  method: Method;
}

export interface PathObstacle {
  name: string | null;
  at_m: number;
  top_m: number;
  bulge_m: number;
  line_m: number;
  fresnel_radius_m: number;
  clearance_m: number;
  clearance_share: number;
  u_clearance_m: number;
  knife_edge_loss_db: number;
}

export interface ProfilePoint {
  at_m: number;
  bulge_m: number;
  line_m: number;
  fresnel_radius_m: number;
}

export interface PathAnswer {
  k_factor: number;
  free_space_loss_db: number;
  obstacles: PathObstacle[];
  diffraction_loss_db: number;
  diffraction_method: string;
  clear: boolean | null;
  expected_level_dbm: number | null;
  expected_levels_dbm: number[] | null;
  u_db: number | null;
  profile: ProfilePoint[];
  remarks: string[];
  method: Method;
}

export interface Footprint {
  inner_edge_m: number | null;
  centre_m: number | null;
  outer_edge_m: number | null;
  text: string;
}

export interface Lean {
  tilt_deg: number;
  skew_deg: number;
  lean_deg: number;
  toward_deg: number;
  text: string;
  method: Method;
}

export interface PeakAnswer {
  peak_deg: number | null;
  peak_u_deg: number | null;
  peak_level_dbm: number;
  peak_level_u_db: number;
  from_last_deg: number | null;
  width_deg: number | null;
  width_u_deg: number | null;
  lobe: 'main' | 'side' | 'unsure';
  odds_main: number;
  noise_db: number;
  used: boolean[];
  left_out: { angle_deg: number; level_dbm: number; why: string }[];
  curve: { angle_deg: number; level_dbm: number }[];
  take_more: { code: string; text: string }[];
  enough: boolean;
  method: Method;
}

/** One face, as tilt.face makes it out of samples. */
export interface FaceHeld {
  mean_deg: number;
  spread_deg: number;
  count: number;
  used: number;
  rejected: number;
  duration_s: number;
  drift_deg: number;
  still: boolean;
  enough: boolean;
  seconds_needed: number;
  up_sign: number | null;
  u_scale: number;
}

export interface TwoFace {
  tilt_deg: number;
  bias_deg: number;
  u_deg: number;
  skew_deg: number | null;
  skew_u_deg: number | null;
}

export interface PredictedFigure {
  end: 'near' | 'far';
  port: string | null;
  figure: string;
  predicted: number;
  u: number;
  measured: number;
}

export interface Candidate {
  name: string;
  code: string;
  port: string | null;
  end: 'near' | 'far' | null;
  odds: number;
  text: string;
  check_next: string;
  predicts: PredictedFigure[];
  cannot_tell_from: string[];
}

export interface FaultRanking {
  candidates: Candidate[];
  /** What a sound link would show, whatever is ranked. */
  expected: PredictedFigure[];
  none_fits: boolean;
  remarks: string[];
  method: Method;
}
