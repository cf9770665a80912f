-- Grain: one row a run: what the published pre-support scores ask for, nothing after the start. A column named after a
-- window (…_pre_worst_6h) holds the worst value for a score that asks for that window, see mart.score_window; one without
-- holds the worst over all windows before support. A drug that the source says was not given has dose 0. A value that is
-- not there says why in record.missing_value.
with pre as (
  select m.run_key, m.analyte, m.value, m.reading, m.window_label
  from record.measurement m join vocabulary.window_label w using (window_label)
  where w.is_pre_support and m.window_label <> 'home_baseline'
), worst as (
  select run_key,
    max(value) filter (where analyte = 'lactate') as lactate_mmol_l,
    min(value) filter (where analyte = 'ph_arterial') as ph,
    min(value) filter (where analyte = 'bicarbonate') as bicarbonate_mmol_l,
    max(value) filter (where analyte = 'creatinine') as creatinine_umol_l,
    max(value) filter (where analyte = 'bilirubin_total') as bilirubin_umol_l,
    max(value) filter (where analyte = 'alt') as alt_u_l,
    max(value) filter (where analyte = 'ast') as ast_u_l,
    min(value) filter (where analyte = 'platelets') as platelets_10_9_l,
    min(value) filter (where analyte = 'prothrombin_activity') as prothrombin_activity_percent,
    max(value) filter (where analyte = 'glucose' and window_label = 'admission') as glucose_mmol_l,
    max(value) filter (where analyte = 'lactate' and window_label = 'admission') as lactate_mmol_l_admission,
    max(value) filter (where analyte = 'creatinine' and window_label = 'admission') as creatinine_umol_l_admission,
    max(value) filter (where analyte = 'lactate' and window_label = 'pre_last') as lactate_mmol_l_pre_last,
    min(value) filter (where analyte = 'lvef') as lvef_percent,
    min(value) filter (where analyte = 'egfr') as egfr_ml_min_1_73m2,
    min(value) filter (where analyte = 'gcs_total') as gcs_total,
    min(value) filter (where analyte = 'sbp') as sbp_mmhg,
    min(value) filter (where analyte = 'dbp') as dbp_mmhg,
    min(value) filter (where analyte = 'map') as map_mmhg,
    min(value) filter (where analyte = 'base_excess') as base_excess_mmol_l,
    max(value) filter (where analyte = 'urea') as urea_mmol_l,
    min(value) filter (where analyte = 'spo2') as spo2_percent,
    max(value) filter (where analyte = 'anion_gap') as anion_gap_mmol_l,
    min(value) filter (where analyte = 'pao2') as pao2_mmhg,
    max(value) filter (where analyte = 'fio2') as fio2,
    min(value) filter (where analyte = 'urine_day') as urine_ml_day,
    max(value) filter (where analyte = 'peak_inspiratory_pressure') as peak_inspiratory_pressure_cmh2o
  from pre group by run_key
), paired as (
  select s.run_key, min(s.value - d.value) as pulse_pressure_mmhg
  from pre s join pre d on d.run_key = s.run_key and d.window_label = s.window_label and d.reading = s.reading
  where s.analyte = 'sbp' and d.analyte = 'dbp' group by s.run_key
), oxygen as (
  select p.run_key, min(p.value / f.value) as pao2_fio2_mmhg
  from pre p join pre f on f.run_key = p.run_key and f.window_label = p.window_label
  where p.analyte = 'pao2' and f.analyte = 'fio2' group by p.run_key
), arrest as (
  select run_key, max(low_flow_min) as low_flow_min, max(call_to_arrival_min) as call_to_arrival_min,
    bool_or(shockable_on_arrival) as rhythm_shockable_at_arrival, bool_or(first_rhythm in ('vf', 'pulseless_vt')) as had_first_rhythm_shockable
  from record.arrest_episode group by run_key
), intubation as (
  select run_key, bool_or(missing_kind = 'not_applicable') as is_not_applicable from record.missing_value
  where field in ('pre_support_state.intubated_at', 'pre_support_state.intubation_hours') group by run_key
), asked as (
  select run_key,
    max(value) filter (where quantity = 'lactate' and asked = 'pre_worst_6h') as lactate_mmol_l_pre_worst_6h,
    max(value) filter (where quantity = 'ph_arterial' and asked = 'pre_worst_6h') as ph_pre_worst_6h,
    max(value) filter (where quantity = 'bicarbonate' and asked = 'pre_worst_6h') as bicarbonate_mmol_l_pre_worst_6h,
    max(value) filter (where quantity = 'sbp' and asked = 'pre_worst_6h') as sbp_mmhg_pre_worst_6h,
    max(value) filter (where quantity = 'dbp' and asked = 'pre_worst_6h') as dbp_mmhg_pre_worst_6h,
    max(value) filter (where quantity = 'map' and asked = 'pre_worst_6h') as map_mmhg_pre_worst_6h,
    max(value) filter (where quantity = 'peak_inspiratory_pressure' and asked = 'pre_worst_6h') as peak_inspiratory_pressure_cmh2o_pre_worst_6h,
    max(value) filter (where quantity = 'pulse_pressure' and asked = 'pre_worst_6h') as pulse_pressure_mmhg_pre_worst_6h,
    max(value) filter (where quantity = 'creatinine' and asked = 'pre_worst_24h') as creatinine_umol_l_pre_worst_24h,
    max(value) filter (where quantity = 'bilirubin_total' and asked = 'pre_worst_24h') as bilirubin_umol_l_pre_worst_24h,
    max(value) filter (where quantity = 'alt' and asked = 'pre_worst_24h') as alt_u_l_pre_worst_24h,
    max(value) filter (where quantity = 'ast' and asked = 'pre_worst_24h') as ast_u_l_pre_worst_24h,
    max(value) filter (where quantity = 'platelets' and asked = 'pre_worst_24h') as platelets_10_9_l_pre_worst_24h,
    max(value) filter (where quantity = 'prothrombin_activity' and asked = 'pre_worst_24h') as prothrombin_activity_percent_pre_worst_24h,
    max(value) filter (where quantity = 'map' and asked = 'pre_worst_24h') as map_mmhg_pre_worst_24h,
    max(value) filter (where quantity = 'gcs_total' and asked = 'pre_worst_24h') as gcs_total_pre_worst_24h,
    max(value) filter (where quantity = 'urine_day' and asked = 'pre_worst_24h') as urine_ml_day_pre_worst_24h,
    max(value) filter (where quantity = 'pao2_fio2' and asked = 'pre_worst_24h') as pao2_fio2_mmhg_pre_worst_24h,
    max(value) filter (where quantity = 'ph_arterial' and asked = 'hospital_arrival') as ph_hospital_arrival
  from mart.score_window group by run_key
), drug as (
  select run_key, drug, dose as value from record.vasoactive_dose join vocabulary.window_label using (window_label)
  where is_pre_support and window_label <> 'home_baseline'
  union all
  select run_key, field[17:], 0.0 from record.missing_value where field like 'vasoactive_dose.%' and missing_kind = 'none'
), doses as (
  select run_key,
    max(value) filter (where drug = 'dopamine') as dopamine_ug_kg_min,
    max(value) filter (where drug = 'dobutamine') as dobutamine_ug_kg_min,
    max(value) filter (where drug = 'adrenaline') as adrenaline_ug_kg_min,
    max(value) filter (where drug = 'noradrenaline') as noradrenaline_ug_kg_min,
    max(value) filter (where drug = 'milrinone') as milrinone_ug_kg_min,
    max(value) filter (where drug = 'vasopressin') as vasopressin_u_kg_min,
    max(value) filter (where drug = 'levosimendan') as levosimendan_ug_kg_min,
    count(distinct drug) = 7 as is_vasoactive_list_complete
  from drug group by run_key
), given as (
  select run_key, quantity, asked, value from mart.score_window
  union all
  select run_key, field[17:], asked, 0.0 from record.missing_value, (values ('pre_worst_6h'), ('pre_worst_24h')) as w(asked)
  where field like 'vasoactive_dose.%' and missing_kind = 'none'
), asked_doses as (
  select run_key,
    max(value) filter (where quantity = 'dopamine' and asked = 'pre_worst_6h') as dopamine_ug_kg_min_pre_worst_6h,
    max(value) filter (where quantity = 'dobutamine' and asked = 'pre_worst_6h') as dobutamine_ug_kg_min_pre_worst_6h,
    max(value) filter (where quantity = 'adrenaline' and asked = 'pre_worst_6h') as adrenaline_ug_kg_min_pre_worst_6h,
    max(value) filter (where quantity = 'noradrenaline' and asked = 'pre_worst_6h') as noradrenaline_ug_kg_min_pre_worst_6h,
    max(value) filter (where quantity = 'milrinone' and asked = 'pre_worst_6h') as milrinone_ug_kg_min_pre_worst_6h,
    max(value) filter (where quantity = 'vasopressin' and asked = 'pre_worst_6h') as vasopressin_u_kg_min_pre_worst_6h,
    max(value) filter (where quantity = 'levosimendan' and asked = 'pre_worst_6h') as levosimendan_ug_kg_min_pre_worst_6h,
    max(value) filter (where quantity = 'dopamine' and asked = 'pre_worst_24h') as dopamine_ug_kg_min_pre_worst_24h,
    max(value) filter (where quantity = 'dobutamine' and asked = 'pre_worst_24h') as dobutamine_ug_kg_min_pre_worst_24h,
    max(value) filter (where quantity = 'adrenaline' and asked = 'pre_worst_24h') as adrenaline_ug_kg_min_pre_worst_24h,
    max(value) filter (where quantity = 'noradrenaline' and asked = 'pre_worst_24h') as noradrenaline_ug_kg_min_pre_worst_24h
  from given group by run_key
)
select
  r.run_key, r.nth_run, r.age_years, r.age_low_years, r.sex_recorded as sex, r.weight_kg, r.height_cm, r.bmi_kg_m2,
  r.indication_group, i.indication_group is not null as has_indication,
  r.indication_group = 'acute_myocardial_infarction' as is_acute_myocardial_infarction,
  r.indication_group = 'myocarditis' as is_myocarditis,
  r.indication_group = 'refractory_ventricular_arrhythmia' as is_refractory_vt_vf,
  r.indication_group = 'primary_graft_dysfunction_heart' or coalesce(h.heart_transplant_recipient, false)
    or coalesce(h.lung_transplant_recipient, false) as is_transplant_graft,
  r.indication_group = 'congenital_adult' or coalesce(h.congenital_heart_disease, false) as is_congenital,
  r.indication_group = 'post_cardiotomy' as is_post_cardiotomy,
  s.had_arrest, s.extracorporeal_cpr as is_extracorporeal_cpr, s.arrest_location, s.shock_stage,
  s.intubation_hours,
  case when s.ventilated_at_zero is not null then s.ventilated_at_zero
       when s.intubation_hours is not null then true
       when x.is_not_applicable then false end as was_ventilated,
  s.compressions_at_cannulation as had_compressions_at_cannulation, s.acute_renal_failure as has_acute_renal_failure, s.liver_failure as has_liver_failure,
  s.cns_dysfunction as has_cns_dysfunction, s.confusion_at_presentation as had_confusion_at_presentation, s.acute_coronary_syndrome as is_acute_coronary_syndrome,
  s.pci_done as had_pci,
  s.timi_flow_after_pci, s.aortic_arch_surgery, s.preoperative_stroke_or_unconscious, s.lv_function,
  h.chronic_kidney_disease as has_chronic_kidney_disease, h.prior_stroke, h.prior_cardiac_surgery,
  h.durable_vad_before as is_after_durable_vad,
  coalesce(h.prior_myocardial_infarction or h.prior_cabg, h.prior_myocardial_infarction, h.prior_cabg) as prior_mi_or_cabg,
  w.* exclude (run_key), p.pulse_pressure_mmhg, o.pao2_fio2_mmhg, a.* exclude (run_key), d.* exclude (run_key),
  q.* exclude (run_key), v.* exclude (run_key)
from mart.run r
left join record.indication i on i.run_key = r.run_key and i.is_primary
left join record.pre_support_state s on s.run_key = r.run_key
left join record.history h on h.run_key = r.run_key
left join intubation x on x.run_key = r.run_key
left join worst w on w.run_key = r.run_key
left join paired p on p.run_key = r.run_key
left join oxygen o on o.run_key = r.run_key
left join arrest a on a.run_key = r.run_key
left join doses d on d.run_key = r.run_key
left join asked q on q.run_key = r.run_key
left join asked_doses v on v.run_key = r.run_key
order by r.run_key
